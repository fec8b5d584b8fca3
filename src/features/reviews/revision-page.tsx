/** One revision as its reviewer meets it: what changed, what to look at first, comments, signature, export. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { Link, useParams } from 'react-router-dom'
import { checklistKeys } from '../../../shared/cautions.ts'
import type { Review } from '../../../shared/contract/reviews.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { formatDateTime, formatNumber, formatSigned } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { useCan, useMe } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { TextLink } from '../../ui/button.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Facts } from '../../ui/facts.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { Status } from '../../ui/status.tsx'
import { ChangeInFigures, LookFirstSection } from './look-first-section.tsx'
import { Restore } from './restore.tsx'
import { AddComment, Comments } from './comments.tsx'
import { ExportLinks } from './export-links.tsx'
import { RevisionMap } from './revision-map.tsx'
import { SignOffSection } from './sign-off-section.tsx'
import { reviewQueries, useReviewMoves } from './queries.ts'
import { tableQueries } from '../tables/queries.ts'
import { InEngine } from './in-engine.tsx'

const stateWord = { draft: 'Draft', submitted: 'Submitted', 'sent-back': 'Sent back', signed: 'Signed' } as const

/** The conclusion the page opens with. */
export function revisionSentence(revision: Revision, review: Review): string {
  const name = revision.kind === 've' ? 'Revision' : 'Target table'
  if (revision.parentValues === null) return `${name} ${revision.number} is the table it came with`
  const look = review.lookFirst.length
  const changed = `${formatNumber(revision.cellsChanged)} ${revision.cellsChanged === 1 ? 'cell changes' : 'cells change'}`
  if (revision.state === 'signed') return `${name} ${revision.number} is signed: ${changed}`
  return look === 0 ? changed : `${changed}; look at ${look === 1 ? 'this one' : `these ${look}`} first`
}

/** "Mostly leaner, by 9 % in the middle of the table." */
export function changeSentence(revision: Revision): string {
  const { values, parentValues } = revision
  if (!parentValues) return 'It is the base that later revisions are compared with.'
  const steps = values
    .map((value, i) => ((value ?? Number.NaN) / (parentValues[i] ?? Number.NaN) - 1) * 100)
    .filter((step) => Number.isFinite(step) && Math.abs(step) > 0.01)
    .sort((a, b) => a - b)
  if (steps.length === 0) return 'No value differs from the revision before.'
  const median = steps[Math.floor(steps.length / 2)]!
  const leaner = steps.filter((step) => step < 0).length
  return `${formatNumber(leaner)} leaner, ${formatNumber(steps.length - leaner)} richer; the middle step is ${formatSigned(median, 1)} %, the largest ${formatSigned(Math.abs(steps[0]!) > Math.abs(steps.at(-1)!) ? steps[0]! : steps.at(-1)!, 1)} %.`
}

/** How many of the cautions were ticked before signing; nothing for the other moves. */
const tickedWords = (ticked: number | null): string =>
  ticked === null ? '' : `, ${ticked} of ${checklistKeys.length} cautions ticked`

export default function RevisionPage() {
  const { vehicleId = '', revisionId = '' } = useParams()
  const revision = useQuery(tableQueries.detail(revisionId))
  const review = useQuery(reviewQueries.detail(revisionId))
  usePageTitle(revision.data ? `Revision ${revision.data.number}` : 'Revision')
  if (revision.isPending || review.isPending) return <Loading what="Reading the revision" />
  const problem = revision.error ?? review.error
  if (problem || !revision.data || !review.data) {
    return (
      <Banner title={problem?.message ?? 'The revision could not be read'}>Go back to the list of revisions.</Banner>
    )
  }
  return <RevisionView vehicleId={vehicleId} revision={revision.data} review={review.data} />
}

function RevisionView({ vehicleId, revision, review }: { vehicleId: string; revision: Revision; review: Review }) {
  const me = useMe()
  const moves = useReviewMoves(revision.id)
  const mayEdit = useCan('table:edit')
  const [cell, setCell] = useState<number | null>(null)
  const cols = revision.grid.rpm.length
  const cellName = (index: number) =>
    `${revision.grid.rpm[index % cols]} rpm, ${revision.grid.mapKpa[Math.floor(index / cols)]} kPa`
  return (
    <Leaf>
      <PageHead
        folio={
          <>
            <span>
              {revision.kind === 've' ? 'Revision' : 'Targets'} {revision.number}
            </span>
            <Status state={stateWord[revision.state]} />
            {revision.flashed ? <span>In the engine{revision.signature ? '' : ', not signed'}</span> : null}
          </>
        }
        title={revisionSentence(revision, review)}
        lead={changeSentence(revision)}
      />
      <Entry
        aside={
          <Note icon="signature" head="What a sign-off is">
            <p>
              A record that a person looked, and at what. It is not a guarantee. Listen for knock on the first pull and
              stop at any doubt.
            </p>
          </Note>
        }
      >
        <Facts
          items={[
            { label: 'Author', value: revision.author.name },
            { label: 'Made', value: formatDateTime(revision.createdAt) },
            {
              label: 'Learned from',
              value:
                revision.logs.length === 0 ? 'no log' : `Logs ${revision.logs.map((log) => log.number).join(', ')}`,
            },
            {
              label: 'Checksum',
              value: `${revision.checksum.slice(0, 4)} ${revision.checksum.slice(4, 8)} … ${revision.checksum.slice(-4)}${review.intact ? '' : ', which the cells do not give'}`,
            },
            ...(revision.coreVersion ? [{ label: 'Learned by core', value: revision.coreVersion }] : []),
            ...(revision.note ? [{ label: 'Note', value: `“${revision.note}”` }] : []),
          ]}
        />
        {review.beside.length > 0 ? <Beside revision={revision} beside={review.beside} vehicleId={vehicleId} /> : null}
        {revision.proposalId && mayEdit ? (
          <p className="mt-3">
            <Link
              className="text-copper underline underline-offset-3"
              to={paths.proposal(vehicleId, revision.proposalId)}
            >
              See the proposal it was made from
            </Link>
          </p>
        ) : null}
      </Entry>
      {review.summary && review.summary.changed > 0 ? <ChangeInFigures summary={review.summary} /> : null}
      {review.lookFirst.length > 0 ? (
        <LookFirstSection lookFirst={review.lookFirst} kind={revision.kind} cellName={cellName} onSelect={setCell} />
      ) : null}
      <Entry
        title="The whole table"
        note={revision.parentValues ? '% against the revision before, or the values' : 'values'}
        aside={
          <Note icon="layers" head="What hatching means">
            <p>No log has been in these cells. They keep the value the table came with, which is a guess.</p>
          </Note>
        }
      >
        <RevisionMap revision={revision} cell={cell} onSelect={setCell} cellName={cellName} />
      </Entry>
      <Entry title="Comments" note={`${review.comments.filter((comment) => !comment.resolvedAt).length} open`}>
        <Comments
          comments={review.comments}
          cellName={cellName}
          moves={moves}
          mayResolve={(comment) => comment.author.id === me.person.id || revision.author.id === me.person.id}
        />
        {review.may.comment ? (
          <AddComment cell={cell} cellName={cellName} mentionable={review.mentionable} moves={moves} />
        ) : null}
      </Entry>
      <Entry
        title="Sign-off"
        aside={
          <Note icon="caution" kind="caution" head="Where local law decides">
            <p>
              Changing emission equipment or calibration may be unlawful on the road. Work that needs a licence belongs
              to those who hold it.
            </p>
          </Note>
        }
      >
        <SignOffSection revision={revision} review={review} moves={moves} />
        {review.history.length > 0 ? (
          <ol className="mt-5 text-small text-ink-faint">
            {review.history.map((move) => (
              <li key={`${move.at}${move.move}`}>
                {formatDateTime(move.at)}: {move.who}, {move.move}
                {tickedWords(move.ticked)}
                {move.note ? ` “${move.note}”` : ''}
              </li>
            ))}
          </ol>
        ) : null}
      </Entry>
      <Entry title="Take it away">
        <ExportLinks revision={revision} />
        {mayEdit ? <InEngine revision={revision} /> : null}
        {mayEdit ? <Restore revision={revision} vehicleId={vehicleId} /> : null}
      </Entry>
    </Leaf>
  )
}

/** Where the history branches, a reviewer is told what this revision does not contain. */
const Beside = ({
  revision,
  beside,
  vehicleId,
}: {
  revision: Revision
  beside: Review['beside']
  vehicleId: string
}) => (
  <div className="mt-4 max-w-(--measure)">
    <Note icon="reason" head="The history branches here">
      <p>
        From the same revision {beside.length === 1 ? 'one other was made' : `${beside.length} others were made`}. What
        they changed is not in this one:
      </p>
      <ul className="flex flex-wrap gap-x-4">
        {beside.map((each) => (
          <li key={each.id}>
            <TextLink to={paths.compareRevisions(vehicleId, each.id, revision.id)}>
              compare with revision {each.number}
            </TextLink>
          </li>
        ))}
      </ul>
    </Note>
  </div>
)
