/** Where the engine misbehaved: what was seen, what it usually means, the stretches to jump to and the cells it concerns. */
import type { Finding, Inspection, Stretch } from '../../../shared/contract/logs.ts'
import { formatClock, formatNumber } from '../../lib/format.ts'
import { Button } from '../../ui/button.tsx'

const urgencyWord = { stop: 'Stop', look: 'Look', note: 'Note' } as const
const stretchesShown = 5

const figure = (value: number): string =>
  formatNumber(value, Number.isInteger(value) || Math.abs(value) >= 100 ? 0 : Math.abs(value) < 10 ? 2 : 1)

interface FindingsProps {
  readonly findings: readonly Finding[]
  readonly grid: NonNullable<Inspection['path']>['grid'] | null
  readonly onStretch: (stretch: Stretch) => void
  readonly onCells: (cells: readonly number[]) => void
}

export function Findings({ findings, grid, onStretch, onCells }: FindingsProps) {
  if (findings.length === 0)
    return <p>Nothing that the detectors know was found. That is no proof: they know only the common faults.</p>
  return (
    <ul>
      {findings.map((each) => (
        <li key={each.kind} className="border-b border-rule py-4">
          <h3 className="font-semibold">
            <span
              className={
                each.urgency === 'stop'
                  ? 'mr-2 rounded-cut bg-ink px-2 py-px text-on-ink'
                  : `mr-2 ${each.urgency === 'look' ? 'text-copper' : 'text-ink-quiet'}`
              }
            >
              {urgencyWord[each.urgency]}
            </span>
            {each.title}
          </h3>
          <p className="mt-1">
            {[
              `${each.times} ${each.times === 1 ? 'time' : 'times'}`,
              ...each.numbers.map(({ label, value, unit }) => `${label} ${figure(value)}${unit ? ` ${unit}` : ''}`),
            ].join('; ')}
          </p>
          <p className="mt-1 max-w-(--measure) text-ink-quiet">{each.usually} (common practice)</p>
          <div className="mt-2 flex flex-wrap items-center gap-x-4 gap-y-1">
            {each.stretches.slice(0, stretchesShown).map((stretch) => (
              <Button key={stretch.fromS} variant="word" onClick={() => onStretch(stretch)}>
                At {formatClock(stretch.fromS)}
              </Button>
            ))}
            {each.stretches.length > stretchesShown ? (
              <span className="text-ink-faint">and {each.times - stretchesShown} more</span>
            ) : null}
            {grid && each.cells.length > 0 ? (
              <Button variant="word" onClick={() => onCells(each.cells)}>
                {each.cells.length === 1 ? 'Its cell' : `Its ${each.cells.length} cells`} on the table
              </Button>
            ) : null}
          </div>
        </li>
      ))}
    </ul>
  )
}
