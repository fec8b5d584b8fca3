/** Any two revisions of a table side by side: the change of every cell, and the cells that differ by size. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useParams, useSearchParams } from 'react-router-dom'
import type { Revision } from '../../../shared/contract/tables.ts'
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { Banner } from '../../ui/banner.tsx'
import { TextLink } from '../../ui/button.tsx'
import { Heatmap, type Selection } from '../../ui/heatmap/heatmap.tsx'
import { Legend } from '../../ui/heatmap/legend.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { tableQueries } from '../tables/queries.ts'
import { compareSentence, differenceOf, type RevisionDifference } from './compare.ts'

export default function ComparePage() {
  const { vehicleId = '' } = useParams()
  const [query] = useSearchParams()
  const from = useQuery(tableQueries.detail(query.get('from') ?? ''))
  const to = useQuery(tableQueries.detail(query.get('to') ?? ''))
  usePageTitle('Two revisions')
  if (from.isPending || to.isPending) return <Loading what="Reading both revisions" />
  const problem = from.error ?? to.error
  if (problem || !from.data || !to.data)
    return <Banner title={problem?.message ?? 'One of them could not be read'}>Choose two in the history.</Banner>
  if (from.data.kind !== to.data.kind)
    return <Banner title="A fuel table and a target table cannot be compared">Choose two of one kind.</Banner>
  return <Comparison vehicleId={vehicleId} from={from.data} to={to.data} />
}

interface ComparisonProps {
  readonly vehicleId: string
  readonly from: Revision
  readonly to: Revision
}

function Comparison({ vehicleId, from, to }: ComparisonProps) {
  const difference = differenceOf(from, to)
  const swap = `${paths.compareRevisions(vehicleId, to.id, from.id)}`
  return (
    <Leaf>
      <PageHead
        folio={<TextLink to={paths.revisions(vehicleId)}>Revisions</TextLink>}
        title={compareSentence(from, to, difference)}
        lead={
          difference.interpolated
            ? `Their axes differ: revision ${from.number} was read between its breakpoints at those of revision ${to.number}.`
            : 'The change is in percent of the earlier value, cell by cell.'
        }
      />
      <Entry
        title="The change"
        note={`revision ${from.number} to revision ${to.number}, %`}
        end={<TextLink to={swap}>Turn round</TextLink>}
        aside={
          <Note icon="info" head="The two">
            {[from, to].map((each) => (
              <p key={each.id}>
                <TextLink to={paths.revision(vehicleId, each.id)}>Revision {each.number}</TextLink>, by{' '}
                {each.author.name}, {each.state === 'signed' ? 'signed' : 'not signed'}
              </p>
            ))}
          </Note>
        }
      >
        <ChangeMap difference={difference} />
      </Entry>
      {difference.differ.length > 0 ? <Cells from={from} to={to} difference={difference} /> : null}
    </Leaf>
  )
}

function ChangeMap({ difference }: { difference: RevisionDifference }) {
  const [selection, setSelection] = useState<Selection | null>(null)
  const { grid, changePct } = difference
  const cols = grid.rpm.length
  return (
    <>
      <Heatmap
        label="Change of every cell in percent"
        grid={grid}
        values={changePct}
        view="change"
        format={(value) => formatSigned(value, 1)}
        formatNarrow={(value) => formatSigned(value, 0)}
        none={() => false}
        selection={selection}
        onSelect={setSelection}
        cellLabel={(cell) =>
          `${grid.rpm[cell % cols]} rpm, ${grid.mapKpa[Math.floor(cell / cols)]} kPa: ${formatSigned(changePct[cell]!, 1)} %`
        }
        snug
      />
      <Legend view="change" unit="%" none={false} />
    </>
  )
}

const mostRows = 100

function Cells({ from, to, difference }: { from: Revision; to: Revision; difference: RevisionDifference }) {
  const digits = to.kind === 've' ? 1 : 3
  const { differ } = difference
  return (
    <Entry title="Cells that differ" note="the largest first">
      <Ledger
        caption="Cells that differ, the largest first"
        head={['rpm', 'kPa', `Revision ${from.number}`, `Revision ${to.number}`, 'Change']}
        numeric={[0, 1, 2, 3, 4]}
      >
        {differ.slice(0, mostRows).map((cell) => (
          <tr key={cell.cell}>
            <td className="num">{cell.rpm}</td>
            <td className="num">{cell.mapKpa}</td>
            <td className="num">{formatNumber(cell.before, digits)}</td>
            <td className="num font-semibold">{formatNumber(cell.after, digits)}</td>
            <td className="num">{formatSigned(cell.changePct, 1)} %</td>
          </tr>
        ))}
      </Ledger>
      {differ.length > mostRows ? <p className="mt-2">And {differ.length - mostRows} more, smaller ones.</p> : null}
    </Entry>
  )
}
