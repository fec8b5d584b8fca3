/** The history of the vehicle's tables as readable lines, newest first. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { Link, useParams } from 'react-router-dom'
import type { RevisionLine } from '../../../shared/contract/tables.ts'
import { formatDate, formatNumber } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { useCan } from '../../lib/session.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { Banner } from '../../ui/banner.tsx'
import { ButtonLink } from '../../ui/button.tsx'
import { Empty } from '../../ui/empty.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { Status } from '../../ui/status.tsx'
import { tableQueries } from '../tables/queries.ts'

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
  const [kind, setKind] = useState<'ve' | 'target'>('ve')
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
  const shown = all.filter((revision) => revision.kind === kind)
  return (
    <Leaf>
      <PageHead
        folio="Revisions"
        title={historySentence(all)}
        lead="A signed revision never changes; a change makes a new one."
      />
      <Entry
        title={kind === 've' ? 'Fuel table' : 'Target table'}
        note={`${formatNumber(shown.length)} ${shown.length === 1 ? 'revision' : 'revisions'}`}
        end={
          <button
            type="button"
            className="cursor-pointer text-copper underline underline-offset-3"
            onClick={() => setKind(kind === 've' ? 'target' : 've')}
          >
            {kind === 've' ? 'Show the target table' : 'Show the fuel table'}
          </button>
        }
        aside={
          <Note icon="info" head="Checking what is in the controller">
            <p>Read the table back from the controller and drop it in: the page says which revision it is.</p>
            <p>
              <Link className="text-copper underline underline-offset-3" to={paths.readBack(vehicleId)}>
                Check a read-back
              </Link>
            </p>
          </Note>
        }
      >
        <Ledger
          caption="Revisions, newest first"
          head={['Date', 'Revision', 'What it says', 'By', 'Checksum', 'State']}
          stack
        >
          {shown.map((revision) => (
            <tr key={revision.id}>
              <td>{formatDate(revision.createdAt)}</td>
              <th scope="row">
                <Link className="text-copper underline underline-offset-3" to={paths.revision(vehicleId, revision.id)}>
                  {kind === 've' ? 'Revision' : 'Targets'} {revision.number}
                </Link>
              </th>
              <td className="wide-cell">
                {whatItSays(revision)}
                {revision.note ? <em className="block text-ink-quiet">“{revision.note}”</em> : null}
                {revision.flashed ? <span className="block text-small text-ink-faint">In the engine</span> : null}
              </td>
              <td>{revision.author.name}</td>
              <td className="text-small text-ink-faint">{revision.checksum.slice(0, 8)}</td>
              <td>
                <Status state={stateWord[revision.state]} />
                {revision.signature ? (
                  <span className="block text-small text-ink-faint">
                    {revision.signature.by.name}
                    {revision.signature.byAuthor ? ', its author' : ''}
                  </span>
                ) : null}
              </td>
            </tr>
          ))}
        </Ledger>
      </Entry>
    </Leaf>
  )
}
