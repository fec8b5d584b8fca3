/** The running count of decisions under the grid, and what the next revision would be. */
import { Check, Equal, Pencil, Pin, Shield } from 'lucide-react'
import { memo, type ReactNode } from 'react'
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { tally, type Decided } from './decisions.ts'

const Count = ({ count, icon, children }: { count: number; icon: ReactNode; children: ReactNode }) => (
  <div className="flex-1 border-l border-rule py-2 pl-3 first:border-l-0 first:pl-0">
    <b className="block text-title font-normal">{formatNumber(count)}</b>
    <span className="flex items-center gap-1 text-small whitespace-nowrap text-ink-quiet">
      {icon}
      {children}
    </span>
  </div>
)

const OpenMark = () => <i aria-hidden className="inline-block size-2.5 border-[1.5px] border-current" />
const NoneMark = () => (
  <i aria-hidden className="inline-block h-2.5 w-3.5 border border-rule [background:var(--hatch)]" />
)

export const TallyRow = memo(function TallyRow({
  decided,
  revisionNumber,
}: {
  decided: Decided
  revisionNumber: number
}) {
  const counts = tally(decided)
  const small = { size: 12, strokeWidth: 2.25, 'aria-hidden': true } as const
  return (
    <>
      <div
        role="group"
        aria-label="Decisions so far"
        className="mt-7 flex flex-wrap items-end border-t-2 border-b border-ink"
      >
        <Count count={counts.accepted} icon={<Check {...small} />}>
          Accepted
        </Count>
        <Count count={counts.byHand} icon={<Pencil {...small} />}>
          By hand
        </Count>
        <Count count={counts.kept} icon={<Equal {...small} />}>
          Kept
        </Count>
        <Count count={counts.pinned} icon={<Pin {...small} />}>
          Pinned
        </Count>
        <Count count={counts.held} icon={<Shield {...small} />}>
          Held
        </Count>
        <Count count={counts.open} icon={<OpenMark />}>
          Open
        </Count>
        <Count count={counts.none} icon={<NoneMark />}>
          No evidence
        </Count>
      </div>
      <p className="mt-4 text-ink-quiet">
        {counts.changed === 0
          ? 'Nothing changes yet. Open and held cells keep their current value until you decide.'
          : `Revision ${revisionNumber} takes ${formatNumber(counts.changed)} changed cells, the largest by ${formatSigned(counts.largestPct, 1)} %. Open and held cells keep their current value until you decide.`}
      </p>
    </>
  )
})
