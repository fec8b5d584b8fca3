/** Going back to an earlier state: a new draft with its cells; nothing is overwritten. */
import { useState } from 'react'
import { useNavigate } from 'react-router-dom'
import type { Revision } from '../../../shared/contract/tables.ts'
import { paths } from '../../lib/paths.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Confirm } from '../../ui/confirm.tsx'
import { useReviewMoves } from './queries.ts'

export function Restore({ revision, vehicleId }: { revision: Revision; vehicleId: string }) {
  const navigate = useNavigate()
  const [asking, setAsking] = useState(false)
  const { restore } = useReviewMoves(revision.id)
  return (
    <div className="mt-4">
      <Button disabled={restore.isPending} onClick={() => setAsking(true)}>
        Go back to these cells
      </Button>
      {restore.isError ? <Banner title={restore.error.message}>Nothing was made.</Banner> : null}
      <Confirm
        open={asking}
        question={`Make a new draft with the cells of ${revision.kind === 've' ? 'revision' : 'target table'} ${revision.number}?`}
        consequence="Every revision made since then stays as it is. The draft needs its own signature before it goes into the engine."
        verb="Make the draft"
        onConfirm={() => {
          setAsking(false)
          restore.mutate('', { onSuccess: (made) => void navigate(paths.revision(vehicleId, made.id)) })
        }}
        onClose={() => setAsking(false)}
      />
    </div>
  )
}
