/** The audit trail: who did what when, newest first, narrowed and taken away as CSV. */
import { useInfiniteQuery, useQuery } from '@tanstack/react-query'
import { useSearchParams } from 'react-router-dom'
import type { AuditEntry, AuditFilter } from '../../../shared/contract/accounts.ts'
import { formatDateTime } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Field, Select } from '../../ui/field.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { vehicleQueries } from '../vehicles/queries.ts'
import { accountQueries } from './queries.ts'

/** How the names of actions begin, and what they are about. */
const kinds: readonly (readonly [action: string, words: string])[] = [
  ['revision.', 'revisions'],
  ['revision.sign-off', 'signatures'],
  ['revision.flash', 'what went into the engine'],
  ['proposal.', 'proposals'],
  ['log.', 'logs'],
  ['comment.', 'comments'],
  ['vehicle.', 'vehicles'],
  ['engine-sheet.', 'engine sheets'],
  ['person.', 'people'],
  ['session.', 'sign-ins'],
  ['token.', 'access tokens'],
  ['workshop.', 'the workshop'],
  ['audit.', 'this trail taken away'],
]

const fields = ['action', 'personId', 'vehicleId', 'from', 'to'] as const

/** The filter stands in the address, so that what one sees can be sent on. */
function useFilter(): [AuditFilter, (field: (typeof fields)[number], value: string) => void] {
  const [query, setQuery] = useSearchParams()
  const filter = Object.fromEntries(
    fields.flatMap((field) => {
      const value = query.get(field)
      return value ? [[field, value] as const] : []
    }),
  )
  const set = (field: (typeof fields)[number], value: string) => {
    const next = new URLSearchParams(query)
    if (value === '') next.delete(field)
    else next.set(field, value)
    setQuery(next, { replace: true })
  }
  return [filter, set]
}

export default function AuditPage() {
  usePageTitle('Audit trail')
  const [filter, setFilter] = useFilter()
  const audit = useInfiniteQuery(accountQueries.audit(filter))
  if (audit.isPending) return <Loading what="Reading the audit trail" />
  const entries = audit.data?.pages.flatMap((page) => page.entries) ?? []
  const last = entries[0]
  const narrowed = Object.keys(filter).length > 0
  return (
    <Leaf>
      <PageHead
        folio="Audit trail"
        title={
          last
            ? `Last: ${actionWords(last.action)} by ${last.personName}`
            : narrowed
              ? 'No entry is like that'
              : 'Nothing was done yet'
        }
        lead="It only grows: the database refuses to change or remove an entry."
      />
      <Entry
        aside={
          <Note icon="info" head="Taking it away">
            <p>
              <a
                className="text-copper underline underline-offset-3"
                href={`/api/audit.csv?${new URLSearchParams(filter)}`}
                download
              >
                {narrowed ? 'These entries as CSV' : 'The whole trail as CSV'}
              </a>
            </p>
            <p>That it was taken away is an entry too.</p>
          </Note>
        }
      >
        <Filters filter={filter} onChange={setFilter} />
        {audit.isError ? <Banner title={audit.error.message}>Change the filter or load the page again.</Banner> : null}
        <Ledger caption="Audit trail, newest first" head={['When', 'Who', 'Did', 'To what']} stack>
          {entries.map((entry) => (
            <EntryLine key={entry.id} entry={entry} />
          ))}
        </Ledger>
        {audit.hasNextPage ? (
          <Button className="mt-4" disabled={audit.isFetchingNextPage} onClick={() => void audit.fetchNextPage()}>
            Earlier entries
          </Button>
        ) : null}
      </Entry>
    </Leaf>
  )
}

const actionWords = (action: string): string => action.replace('.', ', ').replaceAll('-', ' ')

const EntryLine = ({ entry }: { entry: AuditEntry }) => (
  <tr>
    <td>{formatDateTime(entry.at)}</td>
    <th scope="row">{entry.personName}</th>
    <td>{actionWords(entry.action)}</td>
    <td className="[overflow-wrap:anywhere]">{entry.subject}</td>
  </tr>
)

interface FiltersProps {
  readonly filter: AuditFilter
  readonly onChange: (field: (typeof fields)[number], value: string) => void
}

function Filters({ filter, onChange }: FiltersProps) {
  const people = useQuery(accountQueries.people())
  const vehicles = useQuery(vehicleQueries.list())
  const select = (
    field: 'action' | 'personId' | 'vehicleId',
    label: string,
    options: (readonly [string, string])[],
  ) => (
    <Select label={label} value={filter[field] ?? ''} onChange={(event) => onChange(field, event.target.value)}>
      <option value="">all</option>
      {options.map(([value, words]) => (
        <option key={value} value={value}>
          {words}
        </option>
      ))}
    </Select>
  )
  const day = (field: 'from' | 'to', label: string) => (
    <Field
      label={label}
      type="date"
      value={filter[field] ?? ''}
      onChange={(event) => onChange(field, event.target.value)}
    />
  )
  return (
    <fieldset className="mb-6 grid grid-cols-2 gap-4 sm:grid-cols-3">
      <legend className="mb-2 font-semibold">Show</legend>
      {select('action', 'About', [...kinds])}
      {select('personId', 'By', people.data?.people.map(({ id, name }) => [id, name] as const) ?? [])}
      {select('vehicleId', 'Vehicle', vehicles.data?.vehicles.map(({ id, name }) => [id, name] as const) ?? [])}
      {day('from', 'From, UTC')}
      {day('to', 'To, UTC')}
    </fieldset>
  )
}
