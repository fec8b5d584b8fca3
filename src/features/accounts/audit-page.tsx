/** The audit trail: who did what when, newest first. */
import { useInfiniteQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { formatDateTime } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Select } from '../../ui/field.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { accountQueries } from './queries.ts'

const kinds = [
  '',
  'revision',
  'proposal',
  'log',
  'comment',
  'vehicle',
  'engine-sheet',
  'person',
  'session',
  'token',
  'workshop',
]

export default function AuditPage() {
  usePageTitle('Audit trail')
  const [kind, setKind] = useState('')
  const audit = useInfiniteQuery(accountQueries.audit(kind))
  if (audit.isPending) return <Loading what="Reading the audit trail" />
  if (audit.isError) return <Banner title={audit.error.message}>Load the page again.</Banner>
  const entries = audit.data.pages.flatMap((page) => page.entries)
  const last = entries[0]
  return (
    <Leaf>
      <PageHead
        folio="Audit trail"
        title={last ? `Last: ${last.action.replace('.', ', ')} by ${last.personName}` : 'Nothing was done yet'}
        lead="It only grows: the database refuses to change or remove an entry."
      />
      <Entry>
        <div className="mb-4 max-w-60">
          <Select label="Show" value={kind} onChange={(event) => setKind(event.target.value)}>
            {kinds.map((each) => (
              <option key={each} value={each}>
                {each === '' ? 'everything' : each.replace('-', ' ')}
              </option>
            ))}
          </Select>
        </div>
        <Ledger caption="Audit trail, newest first" head={['When', 'Who', 'Did', 'To what']} stack>
          {entries.map((entry) => (
            <tr key={entry.id}>
              <td>{formatDateTime(entry.at)}</td>
              <th scope="row">{entry.personName}</th>
              <td>{entry.action.replace('.', ', ').replaceAll('-', ' ')}</td>
              <td>{entry.subject}</td>
            </tr>
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
