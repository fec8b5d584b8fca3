/**
 * A heatmap that is edited like a spreadsheet: type to set, copy and paste, arithmetic on a selection, undo and redo.
 * It owns no values: every edit is handed to the page, which stores it and undoes it.
 */
import { useRef, useState, type ClipboardEvent, type KeyboardEvent } from 'react'
import { formatNumber } from '../../lib/format.ts'
import { blockText, placePaste, readNumber, type CellValue, type DecimalMark } from './clipboard.ts'
import { EditBar, type Filling } from './edit-bar.tsx'
import { Heatmap, type HeatmapProps } from './heatmap.tsx'
import { cellsOf } from './selection.ts'

export interface EditLimits {
  readonly min: number
  readonly max: number
  /** Decimal places a value is rounded to. */
  readonly digits: number
  /** "VE, %", "lambda". */
  readonly quantity: string
}

interface TableEditorProps extends Omit<HeatmapProps, 'onCopy' | 'onPaste' | 'onDoubleClick' | 'entry'> {
  /** What is edited; what the cells show may be something else, such as the change. */
  readonly edited: readonly (number | null)[]
  readonly mayEdit: boolean
  readonly limits: EditLimits
  readonly decimalMark: DecimalMark
  readonly onDecimalMark: (mark: DecimalMark) => void
  readonly onEdit: (cells: readonly CellValue[]) => void
  readonly onUndo: () => void
  readonly onRedo: () => void
  /** Cells that must not move, such as pinned ones. */
  readonly locked: (cell: number) => boolean
  /** Why nothing can be pasted now; null where it can. */
  readonly pasteRefusal?: string | null
  /** Called before the first figure is typed, so that the page can show what is edited. */
  readonly onType?: () => void
  /** A second table the selection can be filled from. */
  readonly filling?: Filling
}

/** What an edit comes to: the cells that are set, or why none is. */
export function fitEdit(
  cells: readonly CellValue[],
  limits: EditLimits,
  locked: (cell: number) => boolean,
): { cells: CellValue[]; words: string } {
  const free = cells.filter(({ cell }) => !locked(cell))
  const kept = cells.length - free.length
  const stays = kept === 0 ? '' : ` ${formatNumber(kept)} pinned ${kept === 1 ? 'cell stays' : 'cells stay'}.`
  const outside = free.find(({ value }) => !(value >= limits.min && value <= limits.max))
  if (outside) {
    const wanted = formatNumber(outside.value, limits.digits)
    return {
      cells: [],
      words: `Nothing was changed: ${wanted} is outside ${limits.min} to ${limits.max} (${limits.quantity}).`,
    }
  }
  const factor = 10 ** limits.digits
  const rounded = free.map(({ cell, value }) => ({ cell, value: Math.round(value * factor) / factor }))
  return { cells: rounded, words: `${formatNumber(free.length)} ${free.length === 1 ? 'cell' : 'cells'} set.${stays}` }
}

export function TableEditor(props: TableEditorProps) {
  const { edited, mayEdit, limits, decimalMark, onDecimalMark, onEdit, onUndo, onRedo, locked, filling, ...map } = props
  const { pasteRefusal = null, onType, ...heatmap } = map
  const { grid, selection, onSelect } = heatmap
  const [typed, setTyped] = useState<string | null>(null)
  // The field is left once, by Enter or by losing the focus, whichever comes first.
  const isTyping = useRef(false)
  const frame = useRef<HTMLDivElement>(null)
  const [barOpen, setBarOpen] = useState(false)
  const [words, setWords] = useState('')

  const apply = (cells: readonly CellValue[]) => {
    const fitted = fitEdit(cells, limits, locked)
    setWords(fitted.words)
    if (fitted.cells.length > 0) onEdit(fitted.cells)
  }
  const focusCell = () => frame.current?.querySelector<HTMLElement>(`[data-cell="${selection?.focus ?? 0}"]`)?.focus()
  const begin = (text: string | null) => {
    if (!mayEdit || !selection) return
    onType?.()
    isTyping.current = true
    setTyped(text ?? edited[selection.focus]?.toFixed(limits.digits) ?? '')
  }

  const onCopy = (event: ClipboardEvent) => {
    if (!selection || event.target instanceof HTMLInputElement) return
    event.preventDefault()
    event.clipboardData.setData('text/plain', blockText(grid, heatmap.values, selection, decimalMark, limits.digits))
    setWords(`${formatNumber(cellsOf(grid, selection).length)} cells copied with decimal ${decimalMark}.`)
  }
  const onPaste = (event: ClipboardEvent) => {
    if (!selection || !mayEdit || event.target instanceof HTMLInputElement) return
    event.preventDefault()
    if (pasteRefusal) return setWords(pasteRefusal)
    const placed = placePaste(grid, selection, event.clipboardData.getData('text/plain'))
    if (!placed.ok) return setWords(placed.problem)
    onSelect(placed.area)
    apply(placed.cells)
  }
  const onKey = (event: KeyboardEvent) => {
    const ctrl = event.ctrlKey || event.metaKey
    const key = event.key.toLowerCase()
    if (mayEdit && ctrl && (key === 'z' || key === 'y')) {
      event.preventDefault()
      if (key === 'y' || event.shiftKey) onRedo()
      else onUndo()
    } else if (mayEdit && selection && !ctrl && !event.altKey && /^[0-9.,]$|^F2$|^Enter$/.test(event.key)) {
      event.preventDefault()
      begin(event.key.length === 1 ? event.key : null)
    } else if (mayEdit && event.key === '=') {
      event.preventDefault()
      setBarOpen(true)
    } else heatmap.onKey?.(event)
  }
  const finish = (text: string | null) => {
    if (!isTyping.current) return
    isTyping.current = false
    setTyped(null)
    if (text === null || !selection) return
    const value = readNumber(text)
    if (value === null) setWords(`“${text.slice(0, 20)}” is not a number. Nothing was changed.`)
    else apply(cellsOf(grid, selection).map((cell) => ({ cell, value })))
  }

  return (
    <div ref={frame}>
      <Heatmap
        {...heatmap}
        onKey={onKey}
        onCopy={onCopy}
        onPaste={onPaste}
        onSelect={(next) => {
          finish(typed)
          onSelect(next)
        }}
        onDoubleClick={() => begin(null)}
        entry={
          typed === null ? undefined : (
            <Entry
              text={typed}
              name={limits.quantity}
              onText={setTyped}
              onFinish={finish}
              onKeyboardFinish={(text) => {
                finish(text)
                focusCell()
              }}
            />
          )
        }
      />
      <p role="status" className="mt-1 min-h-[20px] text-small text-ink-quiet">
        {words}
      </p>
      <EditBar
        {...{ grid, selection, edited, mayEdit, limits, decimalMark, onDecimalMark, filling }}
        open={barOpen}
        onOpen={setBarOpen}
        onApply={(cells) => {
          apply(cells)
          focusCell()
        }}
        onClose={() => {
          setBarOpen(false)
          focusCell()
        }}
      />
    </div>
  )
}

interface EntryProps {
  readonly text: string
  readonly name: string
  readonly onText: (text: string) => void
  readonly onFinish: (text: string | null) => void
  readonly onKeyboardFinish: (text: string | null) => void
}

/** The field inside the cell. Enter or leaving it sets every selected cell, Escape leaves them as they were. */
function Entry({ text, name, onText, onFinish, onKeyboardFinish }: EntryProps) {
  return (
    <input
      autoFocus
      aria-label={`${name}, for every selected cell`}
      inputMode="decimal"
      autoComplete="off"
      value={text}
      className="absolute inset-0 z-[3] w-full border-2 border-ink bg-sheet px-1 text-right text-ink outline-none"
      onChange={(event) => onText(event.target.value)}
      onBlur={() => onFinish(text)}
      onKeyDown={(event) => {
        event.stopPropagation()
        if (event.key === 'Enter') onKeyboardFinish(text)
        if (event.key === 'Escape') onKeyboardFinish(null)
      }}
    />
  )
}
