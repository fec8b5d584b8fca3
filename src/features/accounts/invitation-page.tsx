/** Taking up an invitation: a new person names themselves, a known one gives their password. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useParams } from 'react-router-dom'
import { acceptInvitation } from '../../../shared/contract/accounts.ts'
import { call } from '../../lib/api.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Field } from '../../ui/field.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Door } from './door.tsx'
import { accountQueries } from './queries.ts'
import { useStart } from './use-start.ts'

export default function InvitationPage() {
  usePageTitle('Invitation')
  const { token = '' } = useParams()
  const [name, setName] = useState('')
  const [password, setPassword] = useState('')
  const invitation = useQuery(accountQueries.invitation(token))
  const start = useStart((body: { name: string; password: string }) =>
    call(acceptInvitation, { params: { token }, body }),
  )
  if (invitation.isPending) return <Loading what="Opening the invitation" />
  if (invitation.isError) {
    return (
      <Door title="This invitation cannot be used">
        <Banner title={invitation.error.message} />
      </Door>
    )
  }
  const { workshopName, email, roles, hasAccount } = invitation.data
  return (
    <Door title={`${workshopName} invites you as ${roles.join(' and ')}.`}>
      <form
        className="grid gap-4"
        onSubmit={(event) => {
          event.preventDefault()
          start.mutate({ name: hasAccount ? email : name, password })
        }}
      >
        <Field label="E-mail" value={email} readOnly autoComplete="username" />
        {hasAccount ? null : (
          <Field
            label="Your name"
            required
            autoComplete="name"
            value={name}
            onChange={(event) => setName(event.target.value)}
          />
        )}
        <Field
          label={hasAccount ? 'Your password' : 'Choose a password'}
          type="password"
          required
          minLength={12}
          hint={hasAccount ? 'You have an account with this address' : 'At least 12 characters; a few words are best'}
          autoComplete={hasAccount ? 'current-password' : 'new-password'}
          value={password}
          onChange={(event) => setPassword(event.target.value)}
        />
        {start.isError ? <Banner title={start.error.message} /> : null}
        <Button variant="solid" type="submit" disabled={start.isPending}>
          Join {workshopName}
        </Button>
      </form>
    </Door>
  )
}
