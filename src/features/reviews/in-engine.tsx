/** Recording that a revision went into the controller; an unsigned one asks twice. */
import { useState } from 'react'
import type { Revision } from '../../../shared/contract/tables.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button } from '../../ui/button.tsx'
import { Confirm } from '../../ui/confirm.tsx'
import { useMarkFlashed } from '../tables/queries.ts'

export function InEngine({ revision }: { revision: Revision }) {
  const [asking, setAsking] = useState(false)
  const mark = useMarkFlashed(revision.id)
  const signed = revision.state === 'signed'
  if (revision.flashed)
    return (
      <p className={`mt-4 ${signed ? '' : 'font-semibold text-copper'}`}>
        This is what the controller holds{signed ? '.' : ', and nobody has signed it.'}
      </p>
    )
  return (
    <div className="mt-4">
      <Button onClick={() => setAsking(true)}>It is in the engine now</Button>
      {mark.isError ? <Banner title={mark.error.message}>Nothing was recorded.</Banner> : null}
      <Confirm
        open={asking}
        question={`Is revision ${revision.number} in the controller now?`}
        consequence={
          signed
            ? 'Logs recorded from now on are compared with this table.'
            : 'Nobody has signed this revision. An unproven table can ruin an engine. Logs recorded from now on are compared with it.'
        }
        verb={signed ? 'Record it' : 'Record it, not signed'}
        onConfirm={() => {
          setAsking(false)
          mark.mutate(!signed)
        }}
        onClose={() => setAsking(false)}
      />
    </div>
  )
}
