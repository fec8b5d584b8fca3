/** The table of cells: a real grid with headers, arrow keys and ranges; load rises upward, speed runs to the right. */
import { useMemo, useRef, type ClipboardEventHandler, type KeyboardEvent, type MouseEvent, type ReactNode } from 'react'
import type { Grid } from '../../../shared/grid.ts'
import { Cell, type HeatmapMark } from './cell.tsx'
import { familyOf, toneOf, type HeatmapView } from './scale.ts'
import { cellAfter, cellsOf, columnOf, everything, rowOf, type Selection } from './selection.ts'

export type { HeatmapMark } from './cell.tsx'
export type { HeatmapView } from './scale.ts'
export { cellsOf, type Selection } from './selection.ts'

export interface HeatmapProps {
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
  /** What is being typed into the focused cell. */
  readonly entry?: ReactNode
  readonly onCopy?: ClipboardEventHandler
  readonly onPaste?: ClipboardEventHandler
  readonly onDoubleClick?: () => void
  readonly snug?: boolean
}

/** Width of the evidence rule, %: logarithmic, full at 100 s. */
const ruleWidth = (seconds: number): number =>
  seconds > 0 ? Math.min(100, Math.max(6, (100 * Math.log10(1 + seconds)) / Math.log10(101))) : 0

const cellUnder = (event: MouseEvent): number | null => {
  const found = (event.target as Element).closest<HTMLElement>('[data-cell]')
  return found ? Number(found.dataset['cell']) : null
}

/** The selection a key asks for; null where the grid has no use for the key. */
function selectionAfter(grid: Grid, selection: Selection | null, event: KeyboardEvent): Selection | null {
  const focus = selection?.focus ?? 0
  const ctrl = event.ctrlKey || event.metaKey
  if (ctrl && event.key === 'a') return everything(grid)
  if (event.key === ' ' && ctrl) return columnOf(grid, focus % grid.rpm.length)
  if (event.key === ' ' && event.shiftKey) return rowOf(grid, Math.floor(focus / grid.rpm.length))
  const next = cellAfter(grid, focus, event.key, ctrl)
  return next === null ? null : { anchor: event.shiftKey ? (selection?.anchor ?? focus) : next, focus: next }
}

export function Heatmap(props: HeatmapProps) {
  const { grid, selection, onSelect, onKey, snug = false } = props
  const table = useRef<HTMLTableElement>(null)
  const cols = grid.rpm.length
  const focus = selection?.focus ?? 0

  const select = (next: Selection) => {
    // First the focus, which may select on its own, then what was asked for.
    table.current?.querySelector<HTMLElement>(`[data-cell="${next.focus}"]`)?.focus()
    onSelect(next)
  }
  const onKeyDown = (event: KeyboardEvent<HTMLTableElement>) => {
    const next = selectionAfter(grid, selection, event)
    if (next) {
      event.preventDefault()
      select(next)
    } else if (event.key === 'Escape') onSelect(null)
    else onKey?.(event)
  }
  const onMouseDown = (event: MouseEvent) => {
    const cell = cellUnder(event)
    if (cell === null || event.button !== 0) return
    onSelect({ anchor: event.shiftKey ? (selection?.anchor ?? cell) : cell, focus: cell })
  }
  const onMouseOver = (event: MouseEvent) => {
    const cell = cellUnder(event)
    if (cell !== null && event.buttons === 1 && selection && cell !== focus) select({ ...selection, focus: cell })
  }

  return (
    <table
      ref={table}
      role="grid"
      aria-label={props.label}
      aria-multiselectable
      className={`map ${snug ? 'snug' : ''}`}
      onKeyDown={onKeyDown}
      onMouseDown={onMouseDown}
      onMouseOver={onMouseOver}
      onFocus={(event) => {
        const cell = (event.target as HTMLElement).dataset['cell']
        if (!selection && cell !== undefined) onSelect({ anchor: Number(cell), focus: Number(cell) })
      }}
      onCopy={props.onCopy}
      onPaste={props.onPaste}
      onDoubleClick={props.onDoubleClick}
    >
      <thead>
        <tr>
          <th scope="col" className="cursor-pointer select-none" onClick={() => select(everything(grid))}>
            {snug ? 'kPa, rpm' : 'rpm'}
          </th>
          {grid.rpm.map((rpm, col) => (
            <th
              key={rpm}
              scope="col"
              onClick={() => select(columnOf(grid, col))}
              className={`cursor-pointer select-none ${selection && focus % cols === col ? 'font-semibold text-ink' : ''}`}
            >
              {rpm}
            </th>
          ))}
        </tr>
      </thead>
      <Rows {...props} onRow={(row) => select(rowOf(grid, row))} />
    </table>
  )
}

function Rows(props: HeatmapProps & { onRow: (row: number) => void }) {
  const { grid, values, view, selection, snug = false } = props
  const cols = grid.rpm.length
  const selected = new Set(selection ? cellsOf(grid, selection) : [])
  const focus = selection?.focus ?? 0
  const { format, formatNarrow, none, mark, evidenceS, cellLabel } = props
  // A move of the cursor changes none of this; a page that keeps its functions is spared writing every cell anew.
  const written = useMemo(() => {
    const family = familyOf(view)
    return values.map((value, cell) => {
      const tone = none(cell) ? null : toneOf(view, value)
      return {
        text: value === null ? null : format(value),
        narrow: value === null || !formatNarrow ? null : formatNarrow(value),
        label: cellLabel(cell),
        tone: tone === null ? null : `${family}-${tone}`,
        mark: mark?.(cell) ?? null,
        rule: ruleWidth(evidenceS?.[cell] ?? 0),
      }
    })
  }, [values, view, format, formatNarrow, none, mark, evidenceS, cellLabel])
  const cellOf = (cell: number) => {
    return (
      <Cell
        key={cell}
        cell={cell}
        {...written[cell]!}
        selected={selected.has(cell)}
        tabbable={focus === cell}
        preview={props.preview?.has(cell) ?? false}
        entry={focus === cell ? props.entry : undefined}
      />
    )
  }
  return (
    <tbody>
      {grid.mapKpa
        .map((mapKpa, row) => (
          <tr key={mapKpa}>
            <th
              scope="row"
              onClick={() => props.onRow(row)}
              className={`cursor-pointer select-none ${selection && Math.floor(focus / cols) === row ? 'font-semibold text-ink' : ''}`}
            >
              {row === grid.mapKpa.length - 1 ? (
                <span className={snug ? 'sr-only' : 'block text-ink-faint phone:sr-only'}>kPa</span>
              ) : null}
              {mapKpa}
            </th>
            {grid.rpm.map((_, col) => cellOf(row * cols + col))}
          </tr>
        ))
        .toReversed()}
    </tbody>
  )
}
