/** The note on the selected cell: what it is, what is proposed, why, and the decision. */
import { ArrowRight, Pin, Shield } from 'lucide-react'
import { useState } from 'react'
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { Button } from '../../ui/button.tsx'
import { Facts } from '../../ui/facts.tsx'
import { readNumber } from '../../ui/heatmap/clipboard.ts'
import { Status } from '../../ui/status.tsx'
import {
  cellState,
  changePct,
  decideAll,
  takenValue,
  type CellChange,
  type CellState,
  type Decided,
} from './decisions.ts'

interface CellCardProps {
  readonly decided: Decided
  /** The cell the card speaks of. */
  readonly cell: number
  /** Every selected cell: the decision goes to all of them. */
  readonly cells: readonly number[]
  readonly mayDecide: boolean
  readonly handInput: { readonly open: boolean; readonly set: (open: boolean) => void }
  readonly onDecide: (changes: readonly CellChange[]) => void
}

const stateWord: Record<CellState, 'Open' | 'Accepted' | 'Kept' | 'By hand' | 'Pinned' | 'Held' | 'No evidence'> = {
  open: 'Open',
  accepted: 'Accepted',
  kept: 'Kept',
  'by-hand': 'By hand',
  pinned: 'Pinned',
  held: 'Held',
  none: 'No evidence',
}

export function CellCard({ decided, cell, cells, mayDecide, handInput, onDecide }: CellCardProps) {
  const { surface } = decided
  const cols = surface.grid.rpm.length
  const rpm = surface.grid.rpm[cell % cols]
  const mapKpa = surface.grid.mapKpa[Math.floor(cell / cols)]
  const state = cellState(decided, cell)
  const current = surface.current[cell] ?? Number.NaN
  const shown = state === 'open' || state === 'held' ? (surface.proposed[cell] ?? current) : takenValue(decided, cell)
  const change = changePct(current, shown)
  const sigma = surface.sigmaPct[cell]
  const held = surface.held.find((entry) => entry.cell === cell)
  const decide = (decision: Exclude<CellChange['decision'], 'by-hand'>) => onDecide(decideAll(decided, cells, decision))
  return (
    <aside aria-label={`Cell ${rpm} rpm, ${mapKpa} kPa`} aria-live="polite">
      <div className="flex items-baseline justify-between">
        <h2 className="text-head font-semibold">
          {rpm} <span className="font-normal text-ink-faint">rpm</span> {mapKpa}{' '}
          <span className="font-normal text-ink-faint">kPa</span>
        </h2>
        <Status state={stateWord[state]} />
      </div>
      <div className="mt-2 flex items-end gap-2.5">
        <p>
          <span className="text-small text-ink-quiet">Current</span>
          <b className="block text-title font-normal">{formatNumber(current, 1)}</b>
        </p>
        <ArrowRight aria-hidden size={16} className="mb-2.5 text-ink-faint" />
        <p>
          <span className="text-small text-ink-quiet">
            {state === 'open' || state === 'held' ? 'Proposed' : 'Taken'}
          </span>
          <b className="block text-title font-normal">{formatNumber(shown, 1)}</b>
        </p>
        <p className="ml-auto text-right">
          <span className="text-small text-ink-quiet">Change</span>
          <b
            className={`block text-title font-semibold ${change < 0 ? 'text-slate' : change > 0 ? 'text-copper' : ''}`}
          >
            {formatSigned(change, 1)}
            <span className="text-note font-normal">&thinsp;%</span>
          </b>
        </p>
      </div>
      <Facts
        items={[
          {
            label: 'Uncertainty',
            value:
              sigma === null || sigma === undefined ? 'cannot tell' : `±${formatNumber((2 * sigma * shown) / 100, 1)}`,
            unit: sigma === null || sigma === undefined ? '' : 'VE, 95 %',
          },
          { label: 'Evidence', value: formatNumber(surface.evidenceS[cell] ?? 0, 1), unit: 's' },
          { label: 'Misfit', value: formatOrDash(surface.misfitPct[cell]), unit: '%' },
          { label: 'By the nearest-cell average', value: formatOptional(surface.handNearest[cell]), unit: 'VE' },
          { label: 'By the bilinear average', value: formatOptional(surface.handBilinear[cell]), unit: 'VE' },
        ]}
      />
      <div className="mt-3.5 mb-4 text-ink-quiet">
        {cells.length > 1 ? (
          <p>{formatNumber(cells.length)} cells are selected; a decision goes to all of them.</p>
        ) : null}
        {state === 'none' ? <p>No log has been here. The value is the one the table came with.</p> : null}
        {held ? (
          <p className="mt-1">
            <span className="flex items-center gap-1.5 font-semibold text-copper">
              <Shield size={14} strokeWidth={2.25} aria-hidden />
              Held
            </span>
            {held.reason}
          </p>
        ) : null}
      </div>
      {mayDecide ? (
        <DecisionButtons {...{ cells, state, current, decide, handInput, onDecide }} shown={shown} />
      ) : (
        <p className="text-ink-quiet">Decisions are the tuner’s; you can read and comment.</p>
      )}
    </aside>
  )
}

const formatOptional = (value: number | null | undefined): string =>
  value === null || value === undefined ? 'none' : formatNumber(value, 1)
const formatOrDash = (value: number | null | undefined): string =>
  value === null || value === undefined ? 'none' : formatSigned(value, 1)

interface DecisionButtonsProps {
  readonly cells: readonly number[]
  readonly state: CellState
  readonly current: number
  readonly shown: number
  readonly decide: (decision: Exclude<CellChange['decision'], 'by-hand'>) => void
  readonly handInput: CellCardProps['handInput']
  readonly onDecide: CellCardProps['onDecide']
}

function DecisionButtons({ cells, state, shown, decide, handInput, onDecide }: DecisionButtonsProps) {
  if (handInput.open) {
    return (
      <ByHand
        start={shown}
        onCancel={() => handInput.set(false)}
        onSet={(value) => {
          handInput.set(false)
          onDecide(cells.map((cell) => ({ cell, decision: 'by-hand', value })))
        }}
      />
    )
  }
  return (
    <>
      <div className="grid grid-cols-2 gap-2">
        <Button
          variant="solid"
          kbd="A"
          disabled={state === 'none' && cells.length === 1}
          onClick={() => decide('accepted')}
        >
          Accept
        </Button>
        <Button kbd="K" onClick={() => decide('kept')}>
          Keep
        </Button>
        <Button kbd="H" onClick={() => handInput.set(true)}>
          By hand
        </Button>
        <Button kbd="P" icon={<Pin size={16} strokeWidth={1.75} aria-hidden />} onClick={() => decide('pinned')}>
          Pin
        </Button>
      </div>
      {state !== 'open' && state !== 'held' && state !== 'none' ? (
        <Button variant="word" onClick={() => decide('open')}>
          Open it again
        </Button>
      ) : null}
    </>
  )
}

function ByHand({ start, onSet, onCancel }: { start: number; onSet: (value: number) => void; onCancel: () => void }) {
  const [text, setText] = useState(start.toFixed(1))
  const value = readNumber(text)
  const usable = value !== null && value >= 1 && value <= 200
  return (
    <form
      onSubmit={(event) => {
        event.preventDefault()
        if (usable) onSet(value)
      }}
    >
      <label className="block font-semibold" htmlFor="by-hand">
        VE by hand
      </label>
      <input
        id="by-hand"
        // The field opens on a key press and is the only thing to type into.
        autoFocus
        inputMode="decimal"
        autoComplete="off"
        value={text}
        aria-invalid={!usable}
        aria-describedby="by-hand-hint"
        onFocus={(event) => event.target.select()}
        onChange={(event) => setText(event.target.value)}
        onKeyDown={(event) => {
          if (event.key === 'Escape') onCancel()
        }}
        className="mt-1 h-(--control-h) w-full rounded-cut border border-rule-strong bg-sheet px-3 text-read aria-invalid:border-2 aria-invalid:border-ink"
      />
      <p id="by-hand-hint" className="mt-1 text-small text-ink-faint">
        {usable ? '%, one decimal place, point or comma' : 'A volumetric efficiency lies between 1 and 200 %.'}
      </p>
      <div className="mt-3 flex gap-2">
        <Button variant="solid" type="submit" disabled={!usable}>
          Set {usable ? formatNumber(value, 1) : 'value'}
        </Button>
        <Button type="button" onClick={onCancel}>
          Leave it
        </Button>
      </div>
    </form>
  )
}
