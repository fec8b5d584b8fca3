/** The vehicle's two tables, and bringing one by file or paste: read first, shown, then stored. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useParams } from 'react-router-dom'
import type { RevisionLine, TableKind } from '../../../shared/contract/tables.ts'
import { formatNumber } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { useCan } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button, ButtonLink, TextLink } from '../../ui/button.tsx'
import { Empty } from '../../ui/empty.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Loading } from '../../ui/loading.tsx'
import { BringTable } from './bring-table.tsx'
import { tableQueries } from './queries.ts'
import { TableMap } from './table-map.tsx'

const nameOf: Record<TableKind, string> = { ve: 'Fuel table', target: 'Target table' }

export default function TablesPage() {
  const { vehicleId = '' } = useParams()
  const revisions = useQuery(tableQueries.list(vehicleId))
  const mayEdit = useCan('table:edit')
  usePageTitle('Tables')
  if (revisions.isPending) return <Loading what="Fetching the tables" />
  if (revisions.isError) return <Banner title={revisions.error.message}>Load the page again.</Banner>
  const all = revisions.data.revisions
  const current = (kind: TableKind) =>
    all.find((each) => each.kind === kind && each.flashed) ?? all.find((each) => each.kind === kind)
  const missing = (['ve', 'target'] as const).filter((kind) => !current(kind))
  return (
    <Leaf>
      <PageHead
        folio="Tables"
        title={
          missing.length === 2
            ? 'Bring the table that is in the controller now'
            : missing.length === 1
              ? `The ${nameOf[missing[0]!].toLowerCase()} is still missing`
              : 'Both tables are here'
        }
        lead="The fuel table holds volumetric efficiency in %, the target table lambda, over engine speed and manifold pressure."
        actions={
          missing.length === 0 ? (
            <ButtonLink variant="solid" to={paths.logs(vehicleId)}>
              Upload a log
            </ButtonLink>
          ) : null
        }
      />
      {(['ve', 'target'] as const).map((kind) => (
        <TableEntry key={kind} kind={kind} vehicleId={vehicleId} current={current(kind)} mayEdit={mayEdit} />
      ))}
    </Leaf>
  )
}

interface TableEntryProps {
  readonly kind: TableKind
  readonly vehicleId: string
  readonly current: RevisionLine | undefined
  readonly mayEdit: boolean
}

function TableEntry({ kind, vehicleId, current, mayEdit }: TableEntryProps) {
  const [bringing, setBringing] = useState(false)
  const open = mayEdit && (bringing || !current)
  return (
    <Entry
      title={nameOf[kind]}
      note={
        current
          ? `${kind === 've' ? 'revision' : 'writing'} ${current.number}${current.flashed ? ', in the engine' : ''}`
          : 'not here yet'
      }
      end={current ? <TextLink to={paths.revision(vehicleId, current.id)}>Open it</TextLink> : null}
    >
      {current ? (
        <CurrentTable revisionId={current.id} kind={kind} />
      ) : mayEdit ? null : (
        <Empty title="No table yet">The tuner brings it.</Empty>
      )}
      {open ? (
        <BringTable vehicleId={vehicleId} kind={kind} first={!current} onClose={() => setBringing(false)} />
      ) : mayEdit ? (
        <Button className="mt-4" onClick={() => setBringing(true)}>
          Bring another {nameOf[kind].toLowerCase()}
        </Button>
      ) : null}
    </Entry>
  )
}

function CurrentTable({ revisionId, kind }: { revisionId: string; kind: TableKind }) {
  const revision = useQuery(tableQueries.detail(revisionId))
  if (revision.isPending) return <Loading what="Fetching the table" />
  if (revision.isError) return <Banner title={revision.error.message}>Load the page again.</Banner>
  return (
    <TableMap
      kind={kind}
      grid={revision.data.grid}
      values={revision.data.values}
      label={`${nameOf[kind]}, ${formatNumber(revision.data.values.length)} cells`}
    />
  )
}
