/** On a phone: the selected cell and its neighbours with their numbers; the patch above is the map to move it by. */
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { familyOf, toneOf } from '../../ui/heatmap/scale.ts'
import { cellState, takenValue, type Decided } from './decisions.ts'
import { viewScale, viewValue, type View } from './views.ts'

interface NearCellsProps {
  readonly decided: Decided
  readonly view: View
  readonly cell: number
  readonly onSelect: (cell: number) => void
}

/** Three rows and columns around the cell, kept inside the table. */
export function around(length: number, at: number): number[] {
  const first = Math.max(0, Math.min(length - 3, at - 1))
  return Array.from({ length: Math.min(3, length) }, (_, i) => first + i)
}

export function NearCells({ decided, view, cell, onSelect }: NearCellsProps) {
  const { grid, proposed } = decided.surface
  const width = grid.rpm.length
  const rows = around(grid.mapKpa.length, Math.floor(cell / width)).toReversed()
  const cols = around(width, cell % width)
  const signed = viewScale[view] === 'change' || viewScale[view] === 'misfit'
  return (
    <div
      className="mt-4 hidden grid-cols-[2rem_repeat(3,1fr)] gap-0.5 phone:grid"
      role="group"
      aria-label="The selected cell and its neighbours"
    >
      {rows.map((row) => [
        <span key={`kpa-${row}`} className="self-center pr-2 text-right text-small text-ink-quiet">
          {grid.mapKpa[row]}
        </span>,
        ...cols.map((col) => {
          const each = row * width + col
          const value = viewValue(decided, view, each)
          const none = cellState(decided, each) === 'none'
          const tone = none ? null : toneOf(viewScale[view], value)
          const name = tone === null ? null : `${familyOf(viewScale[view])}-${tone}`
          const after = decided.decisions[each] === 'open' ? (proposed[each] ?? Number.NaN) : takenValue(decided, each)
          return (
            <button
              key={each}
              type="button"
              aria-pressed={each === cell}
              onClick={() => onSelect(each)}
              style={name ? { background: `var(--color-${name})`, color: `var(--color-on-${name})` } : undefined}
              className="min-h-16 px-2 py-1 text-right text-head aria-pressed:outline-2 aria-pressed:outline-ink [&:not([style])]:text-ink-faint [&:not([style])]:[background:var(--hatch)]"
            >
              {value === null ? 'none' : signed ? formatSigned(value, 1) : formatNumber(value, 1)}
              <span className="block text-small">{formatNumber(after, 1)}</span>
            </button>
          )
        }),
      ])}
      <span className="pr-2 text-right text-small text-ink-faint">rpm</span>
      {cols.map((col) => (
        <span key={col} className="pr-2 text-right text-small text-ink-quiet">
          {grid.rpm[col]}
        </span>
      ))}
    </div>
  )
}
