/** The decision on the selected cells: accept, keep, set by hand, pin, and open again. */
import { Pin } from 'lucide-react'
import { useState } from 'react'
import { formatNumber } from '../../lib/format.ts'
import { Button } from '../../ui/button.tsx'
import { readNumber } from '../../ui/heatmap/clipboard.ts'
import type { CellChange, CellState } from './decisions.ts'

interface DecisionButtonsProps {
  readonly cells: readonly number[]
  readonly state: CellState
  readonly shown: number
  readonly decide: (decision: Exclude<CellChange['decision'], 'by-hand'>) => void
  readonly handInput: { readonly open: boolean; readonly set: (open: boolean) => void }
  readonly onByHand: (value: number) => void
}

export function DecisionButtons({ cells, state, shown, decide, handInput, onByHand }: DecisionButtonsProps) {
  if (handInput.open) {
    return (
      <ByHand
        start={shown}
        onCancel={() => handInput.set(false)}
        onSet={(value) => {
          handInput.set(false)
          onByHand(value)
        }}
      />
    )
  }
  const alone = cells.length === 1
  return (
    <>
      <div className="grid grid-cols-2 gap-2">
        <Button
          variant="solid"
          kbd="A"
          disabled={alone && (state === 'none' || state === 'pinned')}
          onClick={() => decide('accepted')}
        >
          Accept
        </Button>
        <Button kbd="K" disabled={alone && state === 'pinned'} onClick={() => decide('kept')}>
          Keep
        </Button>
        <Button kbd="H" disabled={alone && state === 'pinned'} onClick={() => handInput.set(true)}>
          By hand
        </Button>
        <Button kbd="P" icon={<Pin size={16} strokeWidth={1.75} aria-hidden />} onClick={() => decide('pinned')}>
          Pin
        </Button>
      </div>
      {state !== 'open' && state !== 'held' && state !== 'none' ? (
        <Button variant="word" onClick={() => decide('open')}>
          {state === 'pinned' ? 'Take the pin off' : 'Open it again'}
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
