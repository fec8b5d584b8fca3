/** The history of the vehicle's tables as readable lines, newest first. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useParams } from 'react-router-dom'
import type { HistoryEntry } from '../../../shared/contract/reviews.ts'
import type { RevisionLine, TableKind } from '../../../shared/contract/tables.ts'
import { formatDate, formatNumber } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { useCan } from '../../lib/session.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { Banner } from '../../ui/banner.tsx'
import { ButtonLink, TextLink } from '../../ui/button.tsx'
import { Checkbox } from '../../ui/field.tsx'
import { Empty } from '../../ui/empty.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { Status } from '../../ui/status.tsx'
import { ChangePatch } from '../../ui/heatmap/change-patch.tsx'
import { tableQueries } from '../tables/queries.ts'
import { reviewQueries } from './queries.ts'

const stateWord = { draft: 'Draft', submitted: 'Submitted', 'sent-back': 'Sent back', signed: 'Signed' } as const

/** The conclusion the page opens with. */
export function historySentence(revisions: readonly RevisionLine[]): string {
  const waiting = revisions.find((revision) => revision.state === 'submitted')
  const inEngine = revisions.find((revision) => revision.flashed && revision.kind === 've')
  const name = (revision: RevisionLine) => `${revision.kind === 've' ? 'revision' : 'target table'} ${revision.number}`
  const engine = inEngine ? `${name(inEngine)} is in the engine` : 'nothing is marked as in the engine'
  if (waiting) return `${capital(name(waiting))} waits for a signature; ${engine}`
  const draft = revisions.find((revision) => revision.state === 'draft' && !revision.flashed)
  if (draft) return `${capital(name(draft))} is a draft; ${engine}`
  return capital(engine)
}

const capital = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1)

const originWords: Record<RevisionLine['origin'], string> = {
  upload: 'Brought as a file',
  paste: 'Pasted from a sheet',
  proposal: 'Learned',
  hand: 'Set by hand',
  seed: 'The table it came with',
  restored: 'An earlier state again',
}

function whatItSays(revision: RevisionLine): string {
  if (revision.origin !== 'proposal') return originWords[revision.origin]
  const logs = revision.logs.map((log) => log.number).join(', ')
  return `${formatNumber(revision.cellsChanged)} cells change, from ${revision.logs.length === 1 ? 'Log' : 'Logs'} ${logs}`
}

export default function RevisionsPage() {
  const { vehicleId = '' } = useParams()
  const revisions = useQuery(tableQueries.list(vehicleId))
  const mayBring = useCan('table:edit')
  const [kind, setKind] = useState<TableKind>('ve')
  usePageTitle('Revisions')
  if (revisions.isPending) return <Loading what="Reading the history" />
  if (revisions.isError) return <Banner title={revisions.error.message}>Load the page again.</Banner>
  const all = revisions.data.revisions
  if (all.length === 0) {
    return (
      <Leaf>
        <Empty
          title={mayBring ? 'There is no table yet' : 'Nothing has been signed yet'}
          action={
            mayBring ? (
              <ButtonLink variant="solid" to={paths.tables(vehicleId)}>
                Bring the table
              </ButtonLink>
            ) : null
          }
        >
          {mayBring
            ? 'Upload or paste the fuel table that is in the controller now; it becomes revision 1.'
            : 'You see a revision here once it is signed or in the engine.'}
        </Empty>
      </Leaf>
    )
  }
  return (
    <Leaf>
      <PageHead
        folio="Revisions"
        title={historySentence(all)}
        lead="A signed revision never changes; a change makes a new one."
      />
      <History
        key={kind}
        vehicleId={vehicleId}
        kind={kind}
        lines={all.filter((revision) => revision.kind === kind)}
        onTurn={() => setKind(kind === 've' ? 'target' : 've')}
      />
    </Leaf>
  )
}

interface HistoryProps {
  readonly vehicleId: string
  readonly kind: TableKind
  readonly lines: readonly RevisionLine[]
  readonly onTurn: () => void
}

function History({ vehicleId, kind, lines, onTurn }: HistoryProps) {
  const history = useQuery(reviewQueries.history(vehicleId, kind))
  const [chosen, setChosen] = useState<readonly string[]>([])
  const entryOf = new Map(history.data?.entries.map((entry) => [entry.revisionId, entry]))
  const choose = (id: string) =>
    setChosen(chosen.includes(id) ? chosen.filter((each) => each !== id) : [...chosen.slice(-1), id])
  return (
    <Entry
      title={kind === 've' ? 'Fuel table' : 'Target table'}
      note={`${formatNumber(lines.length)} ${lines.length === 1 ? 'revision' : 'revisions'}`}
      end={
        <button
          type="button"
          className="min-h-6 cursor-pointer text-copper underline underline-offset-3"
          onClick={onTurn}
        >
          {kind === 've' ? 'Show the target table' : 'Show the fuel table'}
        </button>
      }
      aside={
        <>
          <Note icon="info" head="The small pictures">
            <p>Each square is a cell: brown where the value went up, blue where it went down, paper where it stayed.</p>
          </Note>
          <Note icon="info" head="Checking what is in the controller">
            <p>Read the table back from the controller and drop it in: the page says which revision it is.</p>
            <p>
              <TextLink to={paths.readBack(vehicleId)}>Check a read-back</TextLink>
            </p>
          </Note>
        </>
      }
    >
      <Ledger
        caption="Revisions, newest first"
        head={['Change', 'Revision', 'What it says', 'By', 'State', 'Two of them']}
        stack
      >
        {lines.map((line) => (
          <HistoryLine
            key={line.id}
            line={line}
            entry={entryOf.get(line.id)}
            vehicleId={vehicleId}
            chosen={chosen.includes(line.id)}
            onChoose={() => choose(line.id)}
          />
        ))}
      </Ledger>
      {lines.length > 1 ? <CompareChosen vehicleId={vehicleId} lines={lines} chosen={chosen} /> : null}
    </Entry>
  )
}

/** The earlier of the two is compared to the later, whatever the order they were ticked in. */
function CompareChosen({
  vehicleId,
  lines,
  chosen,
}: {
  vehicleId: string
  lines: readonly RevisionLine[]
  chosen: readonly string[]
}) {
  const [from, to] = lines.filter((line) => chosen.includes(line.id)).sort((a, b) => a.number - b.number)
  return (
    <p className="mt-4 min-h-(--control-h)">
      {from && to ? (
        <ButtonLink to={paths.compareRevisions(vehicleId, from.id, to.id)}>
          Compare revision {from.number} with {to.number}
        </ButtonLink>
      ) : (
        <span className="text-ink-quiet">Tick two lines to compare them.</span>
      )}
    </p>
  )
}

/** "2 and 3": where several revisions were made from this one, the history branches. */
const branchWords = (numbers: readonly number[]): string =>
  `${numbers.slice(0, -1).join(', ')} and ${numbers.at(-1)} were both made from it`

interface HistoryLineProps {
  readonly line: RevisionLine
  readonly entry: HistoryEntry | undefined
  readonly vehicleId: string
  readonly chosen: boolean
  readonly onChoose: () => void
}

function HistoryLine({ line, entry, vehicleId, chosen, onChoose }: HistoryLineProps) {
  const name = `${line.kind === 've' ? 'Revision' : 'Targets'} ${line.number}`
  const small = 'block text-small text-ink-faint'
  const origin = entry?.parentNumber ? `from revision ${entry.parentNumber}` : ''
  return (
    <tr>
      <td className="min-w-12 !align-top">
        {entry?.changePct ? <ChangePatch changePct={entry.changePct} cols={entry.cols} /> : null}
      </td>
      <th scope="row">
        <TextLink to={paths.revision(vehicleId, line.id)}>{name}</TextLink>
        <span className={small}>{formatDate(line.createdAt)}</span>
      </th>
      <td className="wide-cell">
        {whatItSays(line)}
        {line.note ? <em className="block text-ink-quiet">“{line.note}”</em> : null}
        <span className={small}>{[origin, line.checksum.slice(0, 8)].filter(Boolean).join(', ')}</span>
        {entry && entry.childNumbers.length > 1 ? (
          <span className={small}>{branchWords(entry.childNumbers)}</span>
        ) : null}
        {entry && entry.openComments > 0 ? (
          <span className={small}>
            {entry.openComments} {entry.openComments === 1 ? 'comment is' : 'comments are'} open
          </span>
        ) : null}
        {line.flashed ? <b className="block text-small">In the engine{line.signature ? '' : ', not signed'}</b> : null}
      </td>
      <td>{line.author.name}</td>
      <td>
        <Status state={stateWord[line.state]} />
        {line.signature ? (
          <span className={small}>
            {line.signature.byAuthor ? 'by its author, ' : ''}
            {line.signature.by.name}, {formatDate(line.signature.at)}
          </span>
        ) : null}
      </td>
      <td>
        <Checkbox label="Compare" aria-label={`Compare ${name}`} checked={chosen} onChange={onChoose} />
      </td>
    </tr>
  )
}
