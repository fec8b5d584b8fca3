/** A vehicle's overview: where it stands, what is known of its engine, and the book so far. */
import { useQuery } from '@tanstack/react-query'
import { useParams } from 'react-router-dom'
import type { LogLine } from '../../../shared/contract/logs.ts'
import type { RevisionLine } from '../../../shared/contract/tables.ts'
import { formatDate, formatNumber } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { useCan } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { ButtonLink, TextLink } from '../../ui/button.tsx'
import { Empty } from '../../ui/empty.tsx'
import { Figures } from '../../ui/facts.tsx'
import { EvidencePatch } from '../../ui/heatmap/patch.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { Status, type StatusWord } from '../../ui/status.tsx'
import { logQueries } from '../logs/queries.ts'
import { logWord } from '../logs/log-word.ts'
import { proposalQueries } from '../proposals/queries.ts'
import { tableQueries } from '../tables/queries.ts'
import { vehicleQueries } from './queries.ts'

interface BookLine {
  readonly at: string
  readonly to: string
  readonly name: string
  readonly says: string
  readonly by: string
  readonly state: StatusWord
}

const revisionWord = { draft: 'Draft', submitted: 'Submitted', 'sent-back': 'Sent back', signed: 'Signed' } as const

/** Logs and revisions in one list, newest first. */
export function bookOf(vehicleId: string, logs: readonly LogLine[], revisions: readonly RevisionLine[]): BookLine[] {
  const lines = [
    ...logs.map((log): BookLine => ({
      at: log.uploadedAt,
      to: paths.log(vehicleId, log.id),
      name: `Log ${log.number}`,
      says: `${formatNumber(log.durationS / 60)} min: ${log.title}`,
      by: log.uploadedBy,
      state: logWord(log),
    })),
    ...revisions.map((revision): BookLine => ({
      at: revision.createdAt,
      to: paths.revision(vehicleId, revision.id),
      name: `${revision.kind === 've' ? 'Revision' : 'Targets'} ${revision.number}`,
      says: revision.flashed
        ? 'In the engine'
        : revision.origin === 'proposal'
          ? `${formatNumber(revision.cellsChanged)} cells change`
          : revision.note || 'A table brought in',
      by: revision.author.name,
      state: revisionWord[revision.state],
    })),
  ]
  return lines.sort((a, b) => b.at.localeCompare(a.at))
}

export default function VehiclePage() {
  const { vehicleId = '' } = useParams()
  const mayEdit = useCan('vehicle:edit')
  const seesProposals = useCan('proposal:read')
  const vehicle = useQuery(vehicleQueries.detail(vehicleId))
  const logs = useQuery(logQueries.list(vehicleId))
  const revisions = useQuery(tableQueries.list(vehicleId))
  const proposals = useQuery({ ...proposalQueries.list(vehicleId), enabled: seesProposals })
  const learned = proposals.data?.proposals.find((proposal) => proposal.counts !== null)
  const detail = useQuery({ ...proposalQueries.detail(learned?.id ?? ''), enabled: learned !== undefined })
  usePageTitle(vehicle.data?.name ?? 'Vehicle')
  if (vehicle.isPending || logs.isPending || revisions.isPending) return <Loading what="Opening the vehicle’s book" />
  if (vehicle.isError || logs.isError || revisions.isError)
    return <Banner title="The vehicle’s book could not be read">Load the page again.</Banner>
  const all = revisions.data.revisions
  const inEngine = all.find((revision) => revision.flashed && revision.kind === 've')
  const waiting = all.find((revision) => revision.state === 'submitted')
  const book = bookOf(vehicleId, logs.data.logs, all)
  const hasTables = all.some(({ kind }) => kind === 've') && all.some(({ kind }) => kind === 'target')
  const next = !hasTables
    ? { to: paths.tables(vehicleId), words: 'Bring the tables' }
    : logs.data.logs.length === 0
      ? { to: paths.logs(vehicleId), words: 'Upload a log' }
      : waiting
        ? { to: paths.revision(vehicleId, waiting.id), words: `Open revision ${waiting.number}` }
        : { to: paths.workbench(vehicleId), words: 'Open the workbench' }
  const surface = detail.data?.surface
  return (
    <Leaf>
      <PageHead
        folio={
          vehicle.data.owners.length > 0
            ? `Owner ${vehicle.data.owners.map((owner) => owner.name).join(', ')}`
            : 'No owner is on it yet'
        }
        title={
          waiting
            ? `Revision ${waiting.number} waits for a signature${inEngine ? `; revision ${inEngine.number} is in the engine` : ''}`
            : inEngine
              ? `Revision ${inEngine.number} is in the engine`
              : 'Nothing is marked as in the engine'
        }
        lead={vehicle.data.description}
        actions={
          mayEdit ? (
            <ButtonLink variant="solid" to={next.to}>
              {next.words}
            </ButtonLink>
          ) : null
        }
      />
      {surface ? (
        <Entry
          title="What is known of this engine"
          aside={
            <Note icon="layers" head="Seconds of evidence">
              <p>
                From hatched, none, to dark, more than a minute. Each cell counts what reaches it, also from its
                neighbours’ readings.
              </p>
            </Note>
          }
        >
          <div className="flex flex-wrap gap-8">
            <EvidencePatch grid={surface.grid} evidenceS={surface.evidenceS} size={300} />
            <Figures
              items={[
                {
                  label: 'cells known',
                  value: formatNumber(learned?.counts?.known ?? 0),
                  unit: `of ${surface.current.length}`,
                },
                {
                  label: 'learned from',
                  value: formatNumber(surface.logs.reduce((sum, log) => sum + log.usedS, 0) / 60),
                  unit: 'min',
                },
              ]}
            />
          </div>
        </Entry>
      ) : null}
      <Entry title="The book so far" note={`${book.length} ${book.length === 1 ? 'entry' : 'entries'}`}>
        {book.length === 0 ? (
          <Empty title="The book is empty">Tables and logs appear here as they come in.</Empty>
        ) : (
          <Ledger
            caption="Logs and revisions, newest first"
            head={['Date', 'Entry', 'What it says', 'By', 'State']}
            stack
          >
            {book.map((line) => (
              <tr key={line.to}>
                <td>{formatDate(line.at)}</td>
                <th scope="row">
                  <TextLink to={line.to}>{line.name}</TextLink>
                </th>
                <td className="wide-cell">{line.says}</td>
                <td>{line.by}</td>
                <td>
                  <Status state={line.state} />
                </td>
              </tr>
            ))}
          </Ledger>
        )}
      </Entry>
    </Leaf>
  )
}
