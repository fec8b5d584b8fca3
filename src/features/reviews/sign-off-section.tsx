/** The place where a revision is submitted, signed or sent back, with the cautions beside the decision. */
import { useState } from 'react'
import { checklistKeys, checklistWords, type ChecklistKey } from '../../../shared/cautions.ts'
import type { Review } from '../../../shared/contract/reviews.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { formatDateTime } from '../../lib/format.ts'
import { useMe } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Checkbox } from '../../ui/field.tsx'
import { Confirm } from '../../ui/confirm.tsx'
import { Field, TextArea } from '../../ui/field.tsx'
import type { useReviewMoves } from './queries.ts'

interface SignOffProps {
  readonly revision: Revision
  readonly review: Review
  readonly moves: ReturnType<typeof useReviewMoves>
}

const Line = ({ name, what, when }: { name: string; what: string; when: string }) => (
  <div className="flex-1">
    <p className="border-b border-ink pb-1 text-head italic">{name || '\u00a0'}</p>
    <p className="flex justify-between text-small text-ink-faint">
      <span>{what}</span>
      <span>{when}</span>
    </p>
  </div>
)

export function SignOffSection({ revision, review, moves }: SignOffProps) {
  const { signature } = revision
  return (
    <>
      <div className="flex flex-wrap gap-8">
        <Line name={revision.author.name} what="Prepared by" when={formatDateTime(revision.createdAt)} />
        <Line
          name={signature?.by.name ?? ''}
          what={signature?.byAuthor ? 'Signed by its author' : 'Reviewed by'}
          when={signature ? formatDateTime(signature.at) : 'not signed'}
        />
      </div>
      {signature?.note ? <p className="mt-3 italic">“{signature.note}”</p> : null}
      {revision.state === 'signed' ? (
        <p className="mt-4">
          Revision {revision.number} is signed and cannot change. A later change makes a new revision.
        </p>
      ) : null}
      {review.may.submit ? <Submit {...{ revision, review, moves }} /> : null}
      {review.may.signOff || review.may.sendBack ? <Decide {...{ revision, review, moves }} /> : null}
      {revision.state === 'submitted' && !review.may.signOff && !review.may.sendBack && review.whyNotSign ? (
        <p className="mt-4 text-ink-quiet">{review.whyNotSign}</p>
      ) : null}
      {review.may.withdraw ? (
        <Button className="mt-3" disabled={moves.withdraw.isPending} onClick={() => moves.withdraw.mutate(undefined)}>
          Take it back
        </Button>
      ) : null}
    </>
  )
}

function Submit({ revision, moves }: SignOffProps) {
  const [asking, setAsking] = useState(false)
  const [note, setNote] = useState('')
  return (
    <div className="mt-5">
      <div className="max-w-(--measure)">
        <TextArea
          label="Words to the reviewer"
          rows={2}
          maxLength={500}
          value={note}
          onChange={(event) => setNote(event.target.value)}
        />
      </div>
      {moves.submit.isError ? <Banner title={moves.submit.error.message}>The draft is kept.</Banner> : null}
      <Button className="mt-3" variant="solid" onClick={() => setAsking(true)}>
        Send for sign-off
      </Button>
      <Confirm
        open={asking}
        question={`Send revision ${revision.number} for sign-off?`}
        consequence="Whoever may sign is told by mail. The cells cannot change while they look."
        verb="Send for sign-off"
        onConfirm={() => {
          setAsking(false)
          moves.submit.mutate(note)
        }}
        onClose={() => setAsking(false)}
      />
    </div>
  )
}

interface ChecklistProps {
  readonly ticked: readonly ChecklistKey[]
  readonly onChange: (ticked: readonly ChecklistKey[]) => void
}

/** The cautions, each ticked on its own; what was ticked is kept with the signature. */
const Checklist = ({ ticked, onChange }: ChecklistProps) => (
  <fieldset>
    <legend className="mb-1 font-semibold">Before you sign</legend>
    {checklistKeys.map((key) => (
      <Checkbox
        key={key}
        label={checklistWords[key]}
        checked={ticked.includes(key)}
        onChange={(event) => onChange(event.target.checked ? [...ticked, key] : ticked.filter((each) => each !== key))}
      />
    ))}
  </fieldset>
)

function Decide({ revision, review, moves }: SignOffProps) {
  const me = useMe()
  const [name, setName] = useState('')
  const [ticked, setTicked] = useState<readonly ChecklistKey[]>([])
  const [note, setNote] = useState('')
  const problem = moves.sign.error ?? moves.sendBack.error
  const ready = ticked.length === checklistKeys.length && name.trim() === me.person.name && review.intact
  return (
    <div className="mt-6 max-w-(--measure)">
      {review.intact ? null : (
        <Banner title="The stored cells do not give the checksum">
          Somebody has changed the database around the product. Do not sign and do not drive on it.
        </Banner>
      )}
      {review.signsOwn ? (
        <p className="mb-4 font-semibold text-copper">
          You prepared this revision yourself. The workshop allows it, and the signature will say “by its author”.
        </p>
      ) : null}
      <Checklist ticked={ticked} onChange={setTicked} />
      <div className="mt-4 grid gap-4">
        <Field
          label="Type your name to sign"
          hint={`As it stands in the workshop: ${me.person.name}`}
          autoComplete="off"
          value={name}
          onChange={(event) => setName(event.target.value)}
        />
        <TextArea
          label="Words that go with it"
          hint="Needed when you send it back"
          rows={2}
          maxLength={500}
          value={note}
          onChange={(event) => setNote(event.target.value)}
        />
      </div>
      {problem ? <Banner title={problem.message}>Nothing was signed; what you wrote is kept.</Banner> : null}
      <div className="mt-4 flex flex-wrap items-center gap-3">
        <Button
          variant="solid"
          disabled={!ready || !review.may.signOff || moves.sign.isPending}
          onClick={() =>
            moves.sign.mutate({ name: name.trim(), checksum: revision.checksum, note, checklist: [...ticked] })
          }
        >
          Sign revision {revision.number}
        </Button>
        <Button
          disabled={note.trim() === '' || !review.may.sendBack || moves.sendBack.isPending}
          onClick={() => moves.sendBack.mutate(note)}
        >
          Send back with words
        </Button>
      </div>
      <p className="mt-2 text-ink-quiet">
        {review.whyNotSign ??
          (ready
            ? `Signing closes revision ${revision.number} for good.`
            : 'Tick every line and type your name to sign; write what should change to send it back.')}
      </p>
    </div>
  )
}
