/** The proposal's table: the editor, the choice of what its cells show, and a second view beside it with a linked cursor. */
import { useMemo, type KeyboardEvent } from 'react'
import { useRemembered } from '../../lib/remember.ts'
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { Heatmap, type HeatmapMark, type Selection } from '../../ui/heatmap/heatmap.tsx'
import { Legend } from '../../ui/heatmap/legend.tsx'
import { TableEditor } from '../../ui/heatmap/table-editor.tsx'
import { cellState, hasEvidence, setByHand, type CellChange, type Decided } from './decisions.ts'
import { ViewChoice } from './view-choice.tsx'
import { viewDigits, viewName, views, viewScale, viewUnit, viewValue, type View } from './views.ts'

interface FuelTableProps {
  readonly decided: Decided
  readonly mayDecide: boolean
  readonly view: View
  readonly onView: (view: View) => void
  readonly second: View | 'none'
  readonly onSecond: (view: View | 'none') => void
  readonly selection: Selection | null
  readonly onSelect: (selection: Selection | null) => void
  readonly preview: ReadonlySet<number>
  readonly onKey: (event: KeyboardEvent) => void
  readonly onDecide: (changes: readonly CellChange[]) => void
  readonly onUndo: () => void
  readonly onRedo: () => void
}

const markOf = (decided: Decided, cell: number): HeatmapMark | null => {
  const state = cellState(decided, cell)
  return state === 'accepted' || state === 'none' ? null : state
}

const isSigned = (view: View) => viewScale[view] === 'change' || viewScale[view] === 'misfit'

/** What a table of the proposal shows, whichever view it is. */
function shown(decided: Decided, view: View) {
  const { surface } = decided
  return {
    label: `${viewName[view]}, ${viewUnit[view]}`,
    grid: surface.grid,
    values: surface.current.map((_, cell) => viewValue(decided, view, cell)),
    view: viewScale[view],
    format: (value: number) => (isSigned(view) ? formatSigned : formatNumber)(value, viewDigits[view]),
    none: (cell: number) => !hasEvidence(surface, cell) && cellState(decided, cell) === 'none',
    mark: (cell: number) => markOf(decided, cell),
    evidenceS: surface.evidenceS,
    cellLabel: (cell: number) => labelOf(decided, view, cell),
  }
}

export function FuelTable(props: FuelTableProps) {
  const { decided, mayDecide, view, onView, second, selection, onSelect, preview, onKey, onDecide } = props
  const { surface } = decided
  const first = useMemo(() => shown(decided, view), [decided, view])
  const beside = useMemo(() => (second === 'none' ? null : shown(decided, second)), [decided, second])
  const edited = useMemo(
    () => decided.surface.current.map((_, cell) => viewValue(decided, 'proposed', cell)),
    [decided],
  )
  const [decimalMark, setDecimalMark] = useRemembered('decimal-mark', ['point', 'comma'] as const)
  return (
    <>
      <div className="mb-3.5 flex flex-wrap items-start justify-between gap-x-6 gap-y-2">
        <ViewChoice view={view} onChange={onView} />
        <SecondChoice second={second} onChange={props.onSecond} />
      </div>
      <TableEditor
        {...first}
        edited={edited}
        mayEdit={mayDecide}
        limits={{ min: 1, max: 200, digits: 1, quantity: 'VE, %' }}
        decimalMark={decimalMark}
        onDecimalMark={setDecimalMark}
        locked={(cell) => decided.decisions[cell] === 'pinned'}
        filling={{ name: 'the proposal', values: surface.proposed }}
        pasteRefusal={view === 'proposed' ? null : 'Show Proposed first: what is pasted becomes the VE of the cells.'}
        onType={() => onView('proposed')}
        onEdit={(cells) => onDecide(setByHand(decided, cells))}
        onUndo={props.onUndo}
        onRedo={props.onRedo}
        selection={selection}
        onSelect={onSelect}
        preview={preview}
        onKey={onKey}
      />
      <Legend view={viewScale[view]} unit={viewUnit[view]} marks />
      {second === 'none' || beside === null ? null : (
        <div className="mt-6 phone:hidden">
          <h2 className="mb-2 font-semibold">{viewName[second]}</h2>
          <Heatmap {...beside} selection={selection} onSelect={onSelect} onKey={onKey} preview={preview} snug />
          <Legend view={viewScale[second]} unit={viewUnit[second]} />
        </div>
      )}
    </>
  )
}

/** Which second table follows the first. */
function SecondChoice({ second, onChange }: { second: View | 'none'; onChange: (view: View | 'none') => void }) {
  return (
    <label className="flex items-center gap-2 text-small text-ink-quiet phone:hidden">
      Second table
      <select
        className="h-8 rounded-cut border border-rule-strong bg-sheet px-2"
        value={second}
        onChange={(event) => onChange(event.target.value as View | 'none')}
      >
        <option value="none">none</option>
        {views.map((view) => (
          <option key={view} value={view}>
            {viewName[view]}
          </option>
        ))}
      </select>
    </label>
  )
}

function labelOf(decided: Decided, view: View, cell: number): string {
  const { surface } = decided
  const cols = surface.grid.rpm.length
  const value = viewValue(decided, view, cell)
  const state = cellState(decided, cell)
  const words =
    state === 'none'
      ? 'no evidence'
      : `${formatNumber(surface.evidenceS[cell] ?? 0, 1)} seconds of evidence, ${state.replace('-', ' ')}`
  return `${surface.grid.rpm[cell % cols]} rpm, ${surface.grid.mapKpa[Math.floor(cell / cols)]} kPa: ${value === null ? 'none' : formatNumber(value, viewDigits[view])}, ${words}`
}
