/** One's own account: theme, workshop, sessions, and access tokens with a line that works. */
import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query'
import { useState } from 'react'
import { useNavigate } from 'react-router-dom'
import type { Role } from '../../../shared/access.ts'
import { signOut, signOutEverywhere } from '../../../shared/contract/accounts.ts'
import { call } from '../../lib/api.ts'
import { formatLongDate } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { useMe } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Field, Select } from '../../ui/field.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Note } from '../../ui/note.tsx'
import { accountQueries, useWorkshopChanges } from './queries.ts'

type Theme = 'system' | 'light' | 'dark'

function readTheme(): Theme {
  const stored = localStorage.getItem('theme')
  return stored === 'light' || stored === 'dark' ? stored : 'system'
}

function applyTheme(theme: Theme): void {
  if (theme === 'system') localStorage.removeItem('theme')
  else localStorage.setItem('theme', theme)
  const dark = theme === 'dark' || (theme === 'system' && matchMedia('(prefers-color-scheme: dark)').matches)
  document.documentElement.dataset['theme'] = dark ? 'dark' : 'light'
}

export default function AccountPage() {
  usePageTitle('Account')
  const me = useMe()
  const [theme, setTheme] = useState(readTheme)
  const changes = useWorkshopChanges()
  return (
    <Leaf>
      <PageHead
        folio="Account"
        title={`You are ${me.person.name}, ${me.roles.join(' and ')}`}
        lead={`${me.person.email}, in ${me.workshop.name}`}
      />
      <Entry title="This device">
        <div className="grid max-w-60 gap-4">
          <Select
            label="Theme"
            value={theme}
            onChange={(event) => {
              const next = event.target.value as Theme
              setTheme(next)
              applyTheme(next)
            }}
          >
            <option value="system">as the system</option>
            <option value="light">light</option>
            <option value="dark">dark</option>
          </Select>
          {me.workshops.length > 1 ? (
            <Select
              label="Workshop"
              value={me.workshop.id}
              onChange={(event) => changes.workshop.mutate(event.target.value)}
            >
              {me.workshops.map((workshop) => (
                <option key={workshop.id} value={workshop.id}>
                  {workshop.name}
                </option>
              ))}
            </Select>
          ) : null}
        </div>
        <Leaving />
      </Entry>
      <Tokens />
    </Leaf>
  )
}

function Leaving() {
  const client = useQueryClient()
  const navigate = useNavigate()
  const onSuccess = () => {
    client.clear()
    void navigate(paths.signIn())
  }
  const here = useMutation({ mutationFn: () => call(signOut), onSuccess })
  const everywhere = useMutation({ mutationFn: () => call(signOutEverywhere), onSuccess })
  return (
    <div className="mt-5 flex flex-wrap gap-3">
      <Button disabled={here.isPending} onClick={() => here.mutate()}>
        Sign out
      </Button>
      <Button disabled={everywhere.isPending} onClick={() => everywhere.mutate()}>
        Sign out everywhere
      </Button>
    </div>
  )
}

function Tokens() {
  const me = useMe()
  const tokens = useQuery(accountQueries.tokens())
  const changes = useWorkshopChanges()
  const [label, setLabel] = useState('')
  const [role, setRole] = useState<Role>(me.roles[0] ?? 'owner')
  const secret = changes.createToken.data?.secret
  return (
    <Entry
      title="Access tokens"
      note="for a logger or a script"
      aside={
        <Note icon="info" head="Everything the pages do">
          <p>
            The{' '}
            <a className="text-copper underline" href="/api/openapi.json">
              OpenAPI document
            </a>{' '}
            lists every address, what it takes and who may call it.
          </p>
        </Note>
      }
    >
      <form
        className="grid max-w-[40rem] gap-4 sm:grid-cols-[1fr_10rem_auto] sm:items-end"
        onSubmit={(event) => {
          event.preventDefault()
          changes.createToken.mutate({ label, role }, { onSuccess: () => setLabel('') })
        }}
      >
        <Field
          label="What it is for"
          required
          maxLength={80}
          value={label}
          onChange={(event) => setLabel(event.target.value)}
        />
        <Select label="May act as" value={role} onChange={(event) => setRole(event.target.value as Role)}>
          {me.roles.map((each) => (
            <option key={each} value={each}>
              {each}
            </option>
          ))}
        </Select>
        <Button type="submit" disabled={changes.createToken.isPending}>
          Make a token
        </Button>
      </form>
      {changes.createToken.isError ? <Banner title={changes.createToken.error.message} /> : null}
      {secret ? (
        <div role="status" className="mt-4 border-t-2 border-b border-ink py-3">
          <p className="font-semibold">Copy it now: it is shown this once.</p>
          <pre className="overflow-x-auto py-2" tabIndex={0}>
            {secret}
          </pre>
        </div>
      ) : null}
      <p className="mt-4">This line lists your vehicles:</p>
      <pre className="overflow-x-auto border-b border-rule bg-sunk p-3 text-small" tabIndex={0}>
        {`curl -H "Authorization: Bearer ${secret ?? 'YOUR_TOKEN'}" ${window.location.origin}/api/vehicles`}
      </pre>
      <p className="mt-4">This one uploads a log:</p>
      <pre className="overflow-x-auto border-b border-rule bg-sunk p-3 text-small" tabIndex={0}>
        {`curl -H "Authorization: Bearer ${secret ?? 'YOUR_TOKEN'}" -F file=@drive.csv ${window.location.origin}/api/vehicles/VEHICLE_ID/logs`}
      </pre>
      <ul className="mt-4">
        {tokens.data?.tokens.map((token) => (
          <li key={token.id} className="flex flex-wrap items-center gap-x-4 border-b border-rule py-2">
            <b>{token.label}</b>
            <span>{token.role}</span>
            <span className="text-ink-faint">
              made {formatLongDate(token.createdAt)},{' '}
              {token.lastUsedAt ? `last used ${formatLongDate(token.lastUsedAt)}` : 'never used'}
            </span>
            <span className="ml-auto">
              <Button
                variant="word"
                aria-label={`Revoke ${token.label}`}
                onClick={() => changes.revokeToken.mutate(token.id)}
              >
                Revoke
              </Button>
            </span>
          </li>
        ))}
      </ul>
    </Entry>
  )
}
