/** The table of cells: a real grid with headers, arrow keys and ranges; load rises upward, speed runs to the right. */
import { Equal, Pencil, Pin, Shield } from 'lucide-react'
import { useRef, type KeyboardEvent } from 'react'
import type { Grid } from '../../../shared/grid.ts'
import { familyOf, toneOf, type HeatmapView } from './scale.ts'

export type { HeatmapView } from './scale.ts'
export type HeatmapMark = 'open' | 'held' | 'pinned' | 'by-hand' | 'kept'

/** A rectangle of cells from anchor to focus; the focus is the cell spoken of. */
export interface Selection {
  readonly anchor: number
  readonly focus: number
}

interface HeatmapProps {
  readonly label: string
  readonly grid: Grid
  readonly values: readonly (number | null)[]
  readonly view: HeatmapView
  readonly format: (value: number) => string
  /** Shorter text for a phone's narrow cells; without it a phone shows the tone alone. */
  readonly formatNarrow?: (value: number) => string
  /** True where no log has been. */
  readonly none: (cell: number) => boolean
  readonly mark?: (cell: number) => HeatmapMark | null
  /** Seconds of evidence, for the rule at the cell's lower edge. */
  readonly evidenceS?: readonly (number | null)[]
  readonly selection: Selection | null
  readonly onSelect: (selection: Selection | null) => void
  readonly cellLabel: (cell: number) => string
  readonly preview?: ReadonlySet<number>
  /** Keys the grid itself does not use. */
  readonly onKey?: (event: KeyboardEvent) => void
  readonly snug?: boolean
}

/** The cells of a selection's rectangle, ascending. */
export function cellsOf(grid: Grid, { anchor, focus }: Selection): number[] {
  const cols = grid.rpm.length
  const [r1, r2] = [Math.floor(anchor / cols), Math.floor(focus / cols)].sort((a, b) => a - b) as [number, number]
  const [c1, c2] = [anchor % cols, focus % cols].sort((a, b) => a - b) as [number, number]
  const cells: number[] = []
  for (let row = r1; row <= r2; row += 1) for (let col = c1; col <= c2; col += 1) cells.push(row * cols + col)
  return cells
}

const steps: Record<string, [row: number, col: number]> = {
  ArrowUp: [1, 0],
  ArrowDown: [-1, 0],
  ArrowRight: [0, 1],
  ArrowLeft: [0, -1],
  PageUp: [4, 0],
  PageDown: [-4, 0],
}

/** Where a key leads, or null when it leads nowhere. */
export function cellAfter(grid: Grid, cell: number, key: string, ctrl: boolean): number | null {
  const cols = grid.rpm.length
  const rows = grid.mapKpa.length
  const row = Math.floor(cell / cols)
  const col = cell % cols
  if (key === 'Home') return ctrl ? (rows - 1) * cols : row * cols
  if (key === 'End') return ctrl ? cols - 1 : row * cols + cols - 1
  const step = steps[key]
  if (!step) return null
  const clamp = (value: number, high: number) => Math.min(high, Math.max(0, value))
  return clamp(row + step[0], rows - 1) * cols + clamp(col + step[1], cols - 1)
}

const icon = { size: 11, strokeWidth: 2.25, 'aria-hidden': true, className: 'mk absolute top-1 left-1' } as const

function Mark({ mark }: { mark: HeatmapMark | null }) {
  if (mark === 'open')
    return <i aria-hidden className="mk absolute top-[5px] left-[5px] size-[7px] border-[1.5px] border-current" />
  if (mark === 'held') return <Shield {...icon} />
  if (mark === 'pinned') return <Pin {...icon} />
  if (mark === 'by-hand') return <Pencil {...icon} />
  if (mark === 'kept') return <Equal {...icon} />
  return null
}

/** Width of the evidence rule, %: logarithmic, full at 100 s. */
const ruleWidth = (seconds: number): number =>
  Math.min(100, Math.max(6, (100 * Math.log10(1 + seconds)) / Math.log10(101)))

export function Heatmap(props: HeatmapProps) {
  const { grid, selection, onSelect, onKey, snug = false } = props
  const table = useRef<HTMLTableElement>(null)
  const cols = grid.rpm.length
  const selected = new Set(selection ? cellsOf(grid, selection) : [])
  const focus = selection?.focus ?? 0
  const focusCell = (cell: number) => table.current?.querySelector<HTMLElement>(`[data-cell="${cell}"]`)?.focus()

  const onKeyDown = (event: KeyboardEvent<HTMLTableElement>) => {
    const next = cellAfter(grid, focus, event.key, event.ctrlKey || event.metaKey)
    if (next !== null) {
      event.preventDefault()
      // First the focus, which may select on its own, then what the key means.
      focusCell(next)
      onSelect({ anchor: event.shiftKey ? (selection?.anchor ?? focus) : next, focus: next })
    } else if (event.key === 'Escape') onSelect(null)
    else if (event.key === 'a' && (event.ctrlKey || event.metaKey)) {
      event.preventDefault()
      onSelect({ anchor: 0, focus: cols * grid.mapKpa.length - 1 })
    } else onKey?.(event)
  }

  return (
    <table
      ref={table}
      role="grid"
      aria-label={props.label}
      aria-multiselectable
      className={`map ${snug ? 'snug' : ''}`}
      onKeyDown={onKeyDown}
    >
      <thead>
        <tr>
          <th scope="col">{snug ? 'kPa, rpm' : 'rpm'}</th>
          {grid.rpm.map((rpm, col) => (
            <th key={rpm} scope="col" className={selection && focus % cols === col ? 'font-semibold text-ink' : ''}>
              {rpm}
            </th>
          ))}
        </tr>
      </thead>
      <tbody>
        {grid.mapKpa
          .map((mapKpa, row) => (
            <tr key={mapKpa}>
              <th scope="row" className={selection && Math.floor(focus / cols) === row ? 'font-semibold text-ink' : ''}>
                {row === grid.mapKpa.length - 1 ? (
                  <span className={snug ? 'sr-only' : 'block text-ink-faint phone:sr-only'}>kPa</span>
                ) : null}
                {mapKpa}
              </th>
              {grid.rpm.map((rpm, col) => (
                <Cell
                  key={rpm}
                  {...props}
                  cell={row * cols + col}
                  selected={selected.has(row * cols + col)}
                  tabbable={focus === row * cols + col}
                />
              ))}
            </tr>
          ))
          .toReversed()}
      </tbody>
    </table>
  )
}

function Cell(props: HeatmapProps & { cell: number; selected: boolean; tabbable: boolean }) {
  const {
    cell,
    values,
    view,
    format,
    formatNarrow,
    none,
    mark,
    evidenceS,
    selection,
    onSelect,
    cellLabel,
    preview,
    selected,
    tabbable,
  } = props
  const value = values[cell] ?? null
  const unknown = none(cell)
  const tone = unknown ? null : toneOf(view, value)
  const name = tone === null ? null : `${familyOf(view)}-${tone}`
  const seconds = evidenceS?.[cell] ?? 0
  return (
    <td
      role="gridcell"
      data-cell={cell}
      tabIndex={tabbable ? 0 : -1}
      aria-selected={selected}
      aria-label={cellLabel(cell)}
      className={`cell ${unknown ? 'none' : ''} ${preview?.has(cell) ? 'preview' : ''}`}
      style={name ? { background: `var(--color-${name})`, color: `var(--color-on-${name})` } : undefined}
      onMouseDown={(event) => onSelect({ anchor: event.shiftKey ? (selection?.anchor ?? cell) : cell, focus: cell })}
      onMouseEnter={(event) => {
        if (event.buttons === 1 && selection) onSelect({ anchor: selection.anchor, focus: cell })
      }}
      onFocus={() => {
        if (!selection) onSelect({ anchor: cell, focus: cell })
      }}
    >
      <Mark mark={mark?.(cell) ?? null} />
      {value === null ? null : (
        <>
          <span className="phone:hidden">{format(value)}</span>
          {formatNarrow ? <span className="hidden phone:inline">{formatNarrow(value)}</span> : null}
        </>
      )}
      {seconds > 0 ? (
        <i
          aria-hidden
          className="ev absolute bottom-0 left-0 h-[3px] bg-current opacity-60"
          style={{ width: `${ruleWidth(seconds)}%` }}
        />
      ) : null}
    </td>
  )
}
