/** Setting a new password with the link from the mail. */
import { useMutation } from '@tanstack/react-query'
import { useState } from 'react'
import { useParams } from 'react-router-dom'
import { resetPassword } from '../../../shared/contract/accounts.ts'
import { call } from '../../lib/api.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button, TextLink } from '../../ui/button.tsx'
import { Field } from '../../ui/field.tsx'
import { Door } from './door.tsx'

export default function ResetPage() {
  usePageTitle('A new password')
  const { token = '' } = useParams()
  const [password, setPassword] = useState('')
  const reset = useMutation({ mutationFn: () => call(resetPassword, { params: { token }, body: { password } }) })
  return (
    <Door title="Choose a new password. Every open session ends.">
      {reset.isSuccess ? (
        <p role="status">
          The new password is set. <TextLink to={paths.signIn()}>Sign in with it</TextLink>
        </p>
      ) : (
        <form
          className="grid gap-4"
          onSubmit={(event) => {
            event.preventDefault()
            reset.mutate()
          }}
        >
          <Field
            label="New password"
            type="password"
            minLength={12}
            hint="At least 12 characters; a few words are best"
            autoComplete="new-password"
            required
            value={password}
            onChange={(event) => setPassword(event.target.value)}
          />
          {reset.isError ? <Banner title={reset.error.message} /> : null}
          <Button variant="solid" type="submit" disabled={reset.isPending}>
            Set the password
          </Button>
        </form>
      )}
    </Door>
  )
}
