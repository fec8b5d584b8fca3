/** Which stretch of the drive is shown, by buttons and keys, and the cursor as a slider. */
import type { KeyboardEvent } from 'react'
import { formatClock } from '../../lib/format.ts'
import { Button } from '../../ui/button.tsx'

export interface StretchShown {
  readonly from: number
  readonly to: number
}

/** Shorter stretches show nothing more, s. */
const leastS = 2

/** Where a key leads, or null where it leads nowhere: + and - zoom around the middle, [ and ] move, 0 shows all. */
export function stretchAfter(key: string, { from, to }: StretchShown, durationS: number): StretchShown | null {
  const length = to - from
  if (key === '+' && length > 2 * leastS) return { from: from + length / 4, to: to - length / 4 }
  if (key === '-') return { from: from - length / 2, to: to + length / 2 }
  if (key === '[') return { from: from - length / 2, to: to - length / 2 }
  if (key === ']') return { from: from + length / 2, to: to + length / 2 }
  return key === '0' ? { from: 0, to: durationS } : null
}

/** Pushed back into the drive; a stretch keeps its length at the ends. */
export function withinDrive({ from, to }: StretchShown, durationS: number): StretchShown {
  const length = Math.min(durationS, Math.max(leastS, to - from))
  const start = Math.max(0, Math.min(durationS - length, from))
  return { from: start, to: start + length }
}

interface StretchBarProps {
  readonly stretch: StretchShown
  readonly durationS: number
  readonly onStretch: (from: number, to: number) => void
  readonly cursorS: number | null
  readonly onCursor: (second: number) => void
}

export function StretchBar({ stretch, durationS, onStretch, cursorS, onCursor }: StretchBarProps) {
  const go = (key: string) => {
    const next = stretchAfter(key, stretch, durationS)
    if (next) onStretch(next.from, next.to)
    return next !== null
  }
  const onKeyDown = (event: KeyboardEvent) => {
    if (!event.ctrlKey && !event.metaKey && !event.altKey && go(event.key)) event.preventDefault()
  }
  const length = stretch.to - stretch.from
  const whole = stretch.from <= 0 && stretch.to >= durationS
  return (
    <div className="mb-3">
      <div className="flex flex-wrap items-center gap-2" role="group" aria-label="Stretch of the drive">
        <Button disabled={stretch.from <= 0} onClick={() => go('[')}>
          Earlier
        </Button>
        <Button disabled={stretch.to >= durationS} onClick={() => go(']')}>
          Later
        </Button>
        <Button disabled={length <= 2 * leastS} onClick={() => go('+')}>
          Closer
        </Button>
        <Button disabled={whole} onClick={() => go('-')}>
          Wider
        </Button>
        <Button disabled={whole} onClick={() => go('0')}>
          Whole drive
        </Button>
        <span role="status" className="text-ink-faint">
          {formatClock(stretch.from)} to {formatClock(stretch.to)}
        </span>
      </div>
      <label className="mt-3 flex items-center gap-3">
        <span className="shrink-0">Cursor {cursorS === null ? '' : formatClock(cursorS)}</span>
        <input
          type="range"
          className="h-6 grow accent-copper"
          min={stretch.from}
          max={stretch.to}
          step={length / 400}
          value={cursorS ?? stretch.from}
          aria-valuetext={formatClock(cursorS ?? stretch.from)}
          onChange={(event) => onCursor(Number(event.target.value))}
          onKeyDown={onKeyDown}
        />
      </label>
      <p className="mt-1 text-small text-ink-faint">
        Drag over a trace to look closer, with Shift to move along. On the cursor: arrows move it, + and − zoom, [ and ]
        move along, 0 shows the whole drive.
      </p>
    </div>
  )
}
