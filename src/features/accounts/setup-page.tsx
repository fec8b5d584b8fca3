/** The first visit: makes the workshop and its admin, who is tuner, owner and reviewer in one until others join. */
import { useState } from 'react'
import { setUp } from '../../../shared/contract/accounts.ts'
import { call } from '../../lib/api.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Field } from '../../ui/field.tsx'
import { Door } from './door.tsx'
import { useStart } from './use-start.ts'

export default function SetupPage() {
  usePageTitle('Make the workshop')
  const [form, setForm] = useState({ workshopName: '', name: '', email: '', password: '' })
  const start = useStart((body: typeof form) => call(setUp, { body }))
  const field = (name: keyof typeof form) => ({
    value: form[name],
    required: true,
    onChange: (event: { target: { value: string } }) => setForm({ ...form, [name]: event.target.value }),
  })
  return (
    <Door title="This installation has no workshop yet. Make it, and be its admin.">
      <form
        className="grid gap-4"
        onSubmit={(event) => {
          event.preventDefault()
          start.mutate(form)
        }}
      >
        <Field label="Name of the workshop" {...field('workshopName')} />
        <Field label="Your name" hint="It stands under what you sign" autoComplete="name" {...field('name')} />
        <Field label="E-mail" type="email" autoComplete="username" {...field('email')} />
        <Field
          label="Password"
          type="password"
          hint="At least 12 characters; a few words are best"
          minLength={12}
          autoComplete="new-password"
          {...field('password')}
        />
        {start.isError ? <Banner title={start.error.message} /> : null}
        <Button variant="solid" type="submit" disabled={start.isPending}>
          Make the workshop
        </Button>
      </form>
    </Door>
  )
}
