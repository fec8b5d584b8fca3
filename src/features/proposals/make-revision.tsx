/** Making the revision: what it holds, a note for the reviewer, and the step that closes the proposal. */
import { useState } from 'react'
import { useNavigate } from 'react-router-dom'
import { formatNumber } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { TextArea } from '../../ui/field.tsx'
import { Note } from '../../ui/note.tsx'
import { tally, type Decided } from './decisions.ts'
import { useMakeRevision } from './queries.ts'

interface MakeRevisionProps {
  readonly vehicleId: string
  readonly proposalId: string
  readonly version: number
  readonly decided: Decided
  readonly onClose: () => void
}

export function MakeRevision({ vehicleId, proposalId, version, decided, onClose }: MakeRevisionProps) {
  const [note, setNote] = useState('')
  const make = useMakeRevision(proposalId)
  const navigate = useNavigate()
  const counts = tally(decided)
  const submit = async () => {
    const revision = await make.mutateAsync({ version, note })
    await navigate(paths.revision(vehicleId, revision.id))
  }
  return (
    <form
      aria-label="Make a revision"
      className="mb-6 border-t-2 border-b border-ink py-4"
      onSubmit={(event) => {
        event.preventDefault()
        void submit().catch(() => undefined)
      }}
    >
      <p>
        {formatNumber(counts.changed)} cells change. {formatNumber(counts.open + counts.held)} open or held cells keep
        their current value. The revision is a draft until somebody signs it.
      </p>
      <div className="mt-3 max-w-(--measure)">
        <TextArea
          label="Note to the reviewer"
          hint="What this revision is for, and what deserves a look"
          rows={3}
          autoFocus
          maxLength={500}
          value={note}
          onChange={(event) => setNote(event.target.value)}
        />
      </div>
      <div className="mt-4 max-w-(--measure)">
        <Note icon="caution" kind="caution" head="Before it goes into the engine">
          <p>
            A wrong fuel table can destroy an engine or start a fire. Lean mixture under load melts pistons: listen for
            knock on the first pull, and stop at any doubt.
          </p>
        </Note>
      </div>
      {make.isError ? <Banner title={make.error.message}>Your decisions and this note are kept.</Banner> : null}
      <div className="mt-4 flex flex-wrap gap-3">
        <Button variant="solid" type="submit" disabled={counts.changed === 0 || make.isPending}>
          Make the revision
        </Button>
        <Button type="button" onClick={onClose}>
          Not yet
        </Button>
      </div>
    </form>
  )
}
