/** Arithmetic on the selection: what to do, by how much, and what it would come to before it is done. */
import { useId, useState } from 'react'
import type { Grid } from '../../../shared/grid.ts'
import { formatNumber } from '../../lib/format.ts'
import { Button } from '../button.tsx'
import { add, blendTowardsNeighbours, interpolate, scale } from './arithmetic.ts'
import { readNumber, type CellValue, type DecimalMark } from './clipboard.ts'
import { cellsOf, type Selection } from './selection.ts'
import type { EditLimits } from './table-editor.tsx'

/** A table to fill the selection from, with what it is called: "the proposal". */
export interface Filling {
  readonly name: string
  readonly values: readonly (number | null)[]
}

interface Work {
  readonly grid: Grid
  readonly selection: Selection
  readonly edited: readonly (number | null)[]
  readonly filling: Filling | undefined
}

interface Operation {
  readonly name: string
  /** What the amount is, with its unit; null for none. */
  readonly amount: ((limits: EditLimits) => string) | null
  readonly start: string
  readonly run: (work: Work, amount: number) => CellValue[]
}

const selected = ({ grid, selection }: Work) => cellsOf(grid, selection)

const operations = {
  scale: {
    name: 'Scale by a percent',
    amount: () => '%, minus makes it smaller',
    start: '2',
    run: (work, amount) => scale(selected(work), work.edited, amount),
  },
  add: {
    name: 'Add',
    amount: ({ quantity }) => quantity,
    start: '1',
    run: (work, amount) => add(selected(work), work.edited, amount),
  },
  set: {
    name: 'Set to',
    amount: ({ quantity }) => quantity,
    start: '',
    run: (work, amount) => selected(work).map((cell) => ({ cell, value: amount })),
  },
  'line-rpm': {
    name: 'Interpolate across, along rpm',
    amount: null,
    start: '',
    run: ({ grid, selection, edited }) => interpolate(grid, selection, edited, 'rpm'),
  },
  'line-load': {
    name: 'Interpolate across, along kPa',
    amount: null,
    start: '',
    run: ({ grid, selection, edited }) => interpolate(grid, selection, edited, 'load'),
  },
  'line-both': {
    name: 'Interpolate between the corners',
    amount: null,
    start: '',
    run: ({ grid, selection, edited }) => interpolate(grid, selection, edited, 'both'),
  },
  blend: {
    name: 'Blend towards neighbours',
    amount: () => '% of the way',
    start: '50',
    run: (work, amount) => blendTowardsNeighbours(work.grid, selected(work), work.edited, amount),
  },
  fill: {
    name: 'Fill from',
    amount: null,
    start: '',
    run: (work) =>
      selected(work).flatMap((cell) => {
        const value = work.filling?.values[cell] ?? null
        return value === null ? [] : [{ cell, value }]
      }),
  },
} as const satisfies Record<string, Operation>
type OperationName = keyof typeof operations

interface EditBarProps {
  readonly grid: Grid
  readonly selection: Selection | null
  readonly edited: readonly (number | null)[]
  readonly mayEdit: boolean
  readonly limits: EditLimits
  readonly decimalMark: DecimalMark
  readonly onDecimalMark: (mark: DecimalMark) => void
  readonly filling: Filling | undefined
  readonly open: boolean
  readonly onOpen: (open: boolean) => void
  readonly onApply: (cells: readonly CellValue[]) => void
  readonly onClose: () => void
}

/** "12 cells, from 50.1 to 62.0": what an edit would leave in the cells. */
function outcome(cells: readonly CellValue[], digits: number): string {
  if (cells.length === 0) return 'No selected cell takes this.'
  const values = cells.map(({ value }) => value)
  const [low, high] = [Math.min(...values), Math.max(...values)]
  const what = cells.length === 1 ? '1 cell becomes' : `${formatNumber(cells.length)} cells become`
  const span = low === high ? '' : ` to ${formatNumber(high, digits)}`
  return `${what} ${formatNumber(low, digits)}${span}.`
}

const box = 'h-(--control-h) rounded-cut border border-rule-strong bg-sheet px-2'

export function EditBar(props: EditBarProps) {
  const { mayEdit, open, onOpen, decimalMark, onDecimalMark, onClose } = props
  return (
    <div className="mb-3 phone:hidden">
      <div className="flex flex-wrap items-center gap-x-6 gap-y-2">
        {mayEdit ? (
          <Button kbd="=" aria-expanded={open} onClick={() => onOpen(!open)}>
            Change the selection
          </Button>
        ) : null}
        <label className="ml-auto flex items-center gap-2 text-small text-ink-quiet">
          Copy with decimal
          <select
            className="h-8 rounded-cut border border-rule-strong bg-sheet px-2"
            value={decimalMark}
            onChange={(event) => onDecimalMark(event.target.value === 'comma' ? 'comma' : 'point')}
          >
            <option value="point">point, 61.5</option>
            <option value="comma">comma, 61,5</option>
          </select>
        </label>
      </div>
      {open && mayEdit && props.selection ? (
        <EditForm {...props} selection={props.selection} onClose={onClose} />
      ) : null}
    </div>
  )
}

function EditForm(props: EditBarProps & { selection: Selection }) {
  const { limits, filling, onApply, onClose } = props
  const id = useId()
  const [name, setName] = useState<OperationName>('scale')
  const [text, setText] = useState<string>(operations.scale.start)
  const operation: Operation = operations[name]
  const amount = operation.amount ? readNumber(text) : 0
  const cells = amount === null ? [] : operation.run(props, amount)
  return (
    <form
      aria-label="Change the selection"
      className="mt-2 border-t-2 border-b border-ink py-3"
      onKeyDown={(event) => {
        if (event.key === 'Escape') onClose()
      }}
      onSubmit={(event) => {
        event.preventDefault()
        if (cells.length > 0) onApply(cells)
      }}
    >
      <div className="flex flex-wrap items-end gap-3">
        <label className="block">
          <span className="mb-1 block font-semibold">What to do</span>
          <select
            autoFocus
            className={box}
            value={name}
            onChange={(event) => {
              const next = event.target.value as OperationName
              setName(next)
              setText(operations[next].start)
            }}
          >
            {Object.entries(operations).map(([key, each]) =>
              key === 'fill' && !filling ? null : (
                <option key={key} value={key}>
                  {key === 'fill' ? `Fill from ${filling?.name}` : each.name}
                </option>
              ),
            )}
          </select>
        </label>
        {operation.amount ? (
          <label className="block" htmlFor={id}>
            <span className="mb-1 block font-semibold">
              Amount <span className="font-normal text-ink-faint">{operation.amount(limits)}</span>
            </span>
            <input
              id={id}
              inputMode="decimal"
              autoComplete="off"
              className={`${box} w-32 text-right aria-invalid:border-2 aria-invalid:border-ink`}
              value={text}
              aria-invalid={amount === null}
              onChange={(event) => setText(event.target.value)}
            />
          </label>
        ) : null}
        <Button type="submit" disabled={cells.length === 0}>
          Change {formatNumber(cells.length)} {cells.length === 1 ? 'cell' : 'cells'}
        </Button>
        <Button variant="word" onClick={onClose}>
          Leave it
        </Button>
      </div>
      <p role="status" className="mt-2 text-small text-ink-quiet">
        {amount === null ? 'A number is needed, with a point or a comma.' : outcome(cells, limits.digits)}
      </p>
    </form>
  )
}
