/** Signing in; an installation without a workshop leads to its set-up. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { Navigate } from 'react-router-dom'
import { signIn } from '../../../shared/contract/accounts.ts'
import { call } from '../../lib/api.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button, TextLink } from '../../ui/button.tsx'
import { Field } from '../../ui/field.tsx'
import { Door } from './door.tsx'
import { accountQueries } from './queries.ts'
import { useStart } from './use-start.ts'

export default function SignInPage() {
  usePageTitle('Sign in')
  const [email, setEmail] = useState('')
  const [password, setPassword] = useState('')
  const setup = useQuery(accountQueries.setup())
  const start = useStart((body: { email: string; password: string }) => call(signIn, { body }))
  if (setup.data?.needed) return <Navigate to={paths.setup()} replace />
  return (
    <Door>
      <form
        className="grid gap-4"
        onSubmit={(event) => {
          event.preventDefault()
          start.mutate({ email, password })
        }}
      >
        <Field
          label="E-mail"
          type="email"
          autoComplete="username"
          required
          value={email}
          onChange={(event) => setEmail(event.target.value)}
        />
        <Field
          label="Password"
          type="password"
          autoComplete="current-password"
          required
          value={password}
          onChange={(event) => setPassword(event.target.value)}
        />
        {start.isError ? <Banner title={start.error.message} /> : null}
        <Button variant="solid" type="submit" disabled={start.isPending}>
          {start.isPending ? 'Signing in…' : 'Sign in'}
        </Button>
      </form>
      <p className="mt-5 flex flex-wrap gap-x-6 gap-y-2">
        <TextLink to={paths.reset()}>Set a new password by mail</TextLink>
        {setup.data?.demoMailbox ? <TextLink to={paths.mails()}>Mails of the demo</TextLink> : null}
      </p>
    </Door>
  )
}
