/** The people of the workshop: who they are, what they may do, and inviting more. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { roles as allRoles, type Role } from '../../../shared/access.ts'
import type { Person } from '../../../shared/contract/accounts.ts'
import { formatLongDate, formatNumber } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { useCan, useMe } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Confirm } from '../../ui/confirm.tsx'
import { Checkbox, Field } from '../../ui/field.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { vehicleQueries } from '../vehicles/queries.ts'
import { accountQueries, useWorkshopChanges } from './queries.ts'

const roleWords: Record<Role, string> = {
  tuner: 'uploads, decides, makes revisions',
  owner: 'reads their own vehicles',
  reviewer: 'signs or sends back',
  admin: 'invites, sets roles',
}

export default function PeoplePage() {
  usePageTitle('People')
  const me = useMe()
  const mayManage = useCan('people:manage')
  const people = useQuery(accountQueries.people())
  const changes = useWorkshopChanges()
  const [leaving, setLeaving] = useState<Person | null>(null)
  if (people.isPending) return <Loading what="Listing the people" />
  if (people.isError) return <Banner title={people.error.message}>Load the page again.</Banner>
  const problem = changes.roles.error ?? changes.remove.error
  const toggle = (person: Person, role: Role, on: boolean) =>
    changes.roles.mutate({
      personId: person.id,
      roles: on ? [...person.roles, role] : person.roles.filter((each) => each !== role),
    })
  return (
    <Leaf>
      <PageHead
        folio={me.workshop.name}
        title={
          people.data.people.length === 1
            ? 'You work alone here'
            : `${formatNumber(people.data.people.length)} people work here`
        }
      />
      <Entry
        title="People"
        aside={
          <Note icon="info" head="What the roles may do">
            {allRoles.map((role) => (
              <p key={role}>
                <b>{role}</b>: {roleWords[role]}
              </p>
            ))}
          </Note>
        }
      >
        {problem ? <Banner title={problem.message} /> : null}
        <Ledger
          caption="People of the workshop"
          head={['Name', 'E-mail', 'Roles', 'Since', ...(mayManage ? ['Actions'] : [])]}
          stack
        >
          {people.data.people.map((person) => (
            <tr key={person.id}>
              <th scope="row">{person.name}</th>
              <td>{person.email}</td>
              <td className="wide-cell">
                {mayManage ? (
                  <span className="flex flex-wrap gap-x-4" role="group" aria-label={`Roles of ${person.name}`}>
                    {allRoles.map((role) => (
                      <Checkbox
                        key={role}
                        label={role}
                        checked={person.roles.includes(role)}
                        disabled={changes.roles.isPending || (person.roles.length === 1 && person.roles.includes(role))}
                        onChange={(event) => toggle(person, role, event.target.checked)}
                      />
                    ))}
                  </span>
                ) : (
                  person.roles.join(', ')
                )}
              </td>
              <td>{formatLongDate(person.joinedAt)}</td>
              {mayManage ? (
                <td>
                  {person.id === me.person.id ? (
                    <span className="text-ink-faint">you</span>
                  ) : (
                    <Button variant="word" aria-label={`Take ${person.name} out`} onClick={() => setLeaving(person)}>
                      Take out
                    </Button>
                  )}
                </td>
              ) : null}
            </tr>
          ))}
        </Ledger>
        <Confirm
          open={leaving !== null}
          question={`Take ${leaving?.name ?? ''} out of the workshop?`}
          consequence="Their sessions and access tokens end at once. What they did stays in the audit trail."
          verb="Take them out"
          onConfirm={() => {
            if (leaving) changes.remove.mutate(leaving.id)
            setLeaving(null)
          }}
          onClose={() => setLeaving(null)}
        />
      </Entry>
      {mayManage ? <Inviting changes={changes} /> : null}
      {mayManage ? (
        <Entry
          title="Sign-off"
          aside={
            <Note icon="info" head="Four eyes">
              <p>
                A second person sees what its author no longer sees. Who works alone can sign their own work, and the
                signature says so.
              </p>
            </Note>
          }
        >
          <Checkbox
            label="Authors may sign their own revisions"
            hint="The signature then says “by its author”"
            checked={me.workshop.allowOwnSignOff}
            disabled={changes.settings.isPending}
            onChange={(event) => changes.settings.mutate({ allowOwnSignOff: event.target.checked })}
          />
        </Entry>
      ) : null}
    </Leaf>
  )
}

function Inviting({ changes }: { changes: ReturnType<typeof useWorkshopChanges> }) {
  const [email, setEmail] = useState('')
  const [roles, setRoles] = useState<readonly Role[]>(['owner'])
  const [vehicleIds, setVehicleIds] = useState<readonly string[]>([])
  const invitations = useQuery(accountQueries.invitations())
  const vehicles = useQuery(vehicleQueries.list())
  const flip = <T,>(list: readonly T[], value: T, on: boolean): T[] =>
    on ? [...list, value] : list.filter((each) => each !== value)
  return (
    <Entry title="Invite somebody">
      <form
        className="grid max-w-[40rem] gap-4"
        onSubmit={(event) => {
          event.preventDefault()
          changes.invite.mutate(
            { email, roles: [...roles], vehicleIds: [...vehicleIds] },
            { onSuccess: () => setEmail('') },
          )
        }}
      >
        <Field label="E-mail" type="email" required value={email} onChange={(event) => setEmail(event.target.value)} />
        <fieldset>
          <legend className="font-semibold">Roles</legend>
          <div className="flex flex-wrap gap-x-5">
            {allRoles.map((role) => (
              <Checkbox
                key={role}
                label={role}
                checked={roles.includes(role)}
                onChange={(event) => setRoles(flip(roles, role, event.target.checked))}
              />
            ))}
          </div>
        </fieldset>
        {roles.includes('owner') && vehicles.data?.vehicles.length ? (
          <fieldset>
            <legend className="font-semibold">Owner of</legend>
            <div className="flex flex-wrap gap-x-5">
              {vehicles.data.vehicles.map((vehicle) => (
                <Checkbox
                  key={vehicle.id}
                  label={vehicle.name}
                  checked={vehicleIds.includes(vehicle.id)}
                  onChange={(event) => setVehicleIds(flip(vehicleIds, vehicle.id, event.target.checked))}
                />
              ))}
            </div>
          </fieldset>
        ) : null}
        {changes.invite.isError ? <Banner title={changes.invite.error.message} /> : null}
        {changes.invite.isSuccess ? <p role="status">The invitation is on its way.</p> : null}
        <div>
          <Button variant="solid" type="submit" disabled={roles.length === 0 || changes.invite.isPending}>
            Send the invitation
          </Button>
        </div>
      </form>
      {invitations.data?.invitations.length ? (
        <ul className="mt-5">
          {invitations.data.invitations.map((invitation) => (
            <li key={invitation.id} className="flex flex-wrap items-center gap-x-4 border-b border-rule py-2">
              <b>{invitation.email}</b>
              <span>{invitation.roles.join(', ')}</span>
              <span className="text-ink-faint">until {formatLongDate(invitation.expiresAt)}</span>
              <span className="ml-auto">
                <Button
                  variant="word"
                  aria-label={`Take back the invitation of ${invitation.email}`}
                  onClick={() => changes.withdraw.mutate(invitation.id)}
                >
                  Take it back
                </Button>
              </span>
            </li>
          ))}
        </ul>
      ) : null}
    </Entry>
  )
}
