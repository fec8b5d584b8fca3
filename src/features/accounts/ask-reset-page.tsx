/** Asking for a link that sets a new password; the answer is the same whether or not the account exists. */
import { useMutation } from '@tanstack/react-query'
import { useState } from 'react'
import { askPasswordReset } from '../../../shared/contract/accounts.ts'
import { call } from '../../lib/api.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button, TextLink } from '../../ui/button.tsx'
import { Field } from '../../ui/field.tsx'
import { Door } from './door.tsx'

export default function AskResetPage() {
  usePageTitle('A new password')
  const [email, setEmail] = useState('')
  const ask = useMutation({ mutationFn: () => call(askPasswordReset, { body: { email } }) })
  return (
    <Door title="A link that sets a new password comes by mail and works once, for one hour.">
      {ask.isSuccess ? (
        <p role="status">If there is an account with this address, the mail is on its way.</p>
      ) : (
        <form
          className="grid gap-4"
          onSubmit={(event) => {
            event.preventDefault()
            ask.mutate()
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
          {ask.isError ? <Banner title={ask.error.message} /> : null}
          <Button variant="solid" type="submit" disabled={ask.isPending}>
            Send the link
          </Button>
        </form>
      )}
      <p className="mt-5">
        <TextLink to={paths.signIn()}>Back to the sign-in</TextLink>
      </p>
    </Door>
  )
}
