/** Accepting by rule: the conditions, how many cells they take, and a preview on the grid before anything happens. */
import { useState } from 'react'
import { formatNumber } from '../../lib/format.ts'
import { Button } from '../../ui/button.tsx'
import { Field } from '../../ui/field.tsx'
import { cellsByRule, readNumber, type Decided } from './decisions.ts'

interface AcceptByRuleProps {
  readonly decided: Decided
  readonly onPreview: (cells: readonly number[]) => void
  readonly onAccept: (cells: readonly number[]) => void
  readonly onClose: () => void
}

export function AcceptByRule({ decided, onPreview, onAccept, onClose }: AcceptByRuleProps) {
  const [evidence, setEvidence] = useState('5')
  const [sigmas, setSigmas] = useState('2')
  const evidenceS = readNumber(evidence)
  const least = readNumber(sigmas)
  const usable = evidenceS !== null && evidenceS >= 0 && least !== null && least >= 0
  const cells = usable ? cellsByRule(decided, { evidenceS, sigmas: least }) : []
  const preview = (nextEvidence: string, nextSigmas: string) => {
    const s = readNumber(nextEvidence)
    const k = readNumber(nextSigmas)
    onPreview(s === null || k === null ? [] : cellsByRule(decided, { evidenceS: s, sigmas: k }))
  }
  return (
    <form
      aria-label="Accept by rule"
      className="mb-6 border-t-2 border-b border-ink py-4"
      onSubmit={(event) => {
        event.preventDefault()
        onAccept(cells)
      }}
    >
      <div className="grid gap-4 sm:grid-cols-2">
        <Field
          label="Evidence at least"
          hint="seconds of useful data in the cell"
          inputMode="decimal"
          value={evidence}
          autoFocus
          onFocus={() => preview(evidence, sigmas)}
          onChange={(event) => {
            setEvidence(event.target.value)
            preview(event.target.value, sigmas)
          }}
        />
        <Field
          label="Change at least"
          hint="times its own uncertainty (one standard deviation); 0 takes every change"
          inputMode="decimal"
          value={sigmas}
          onChange={(event) => {
            setSigmas(event.target.value)
            preview(evidence, event.target.value)
          }}
        />
      </div>
      <p role="status" className="mt-3">
        {!usable
          ? 'Two numbers are needed, 0 or above.'
          : cells.length === 0
            ? 'No open cell meets this.'
            : `${formatNumber(cells.length)} open ${cells.length === 1 ? 'cell meets' : 'cells meet'} this, outlined on the grid. Held cells are never taken by rule.`}
      </p>
      <div className="mt-3 flex flex-wrap gap-3">
        <Button variant="solid" type="submit" disabled={cells.length === 0}>
          Accept {formatNumber(cells.length)} {cells.length === 1 ? 'cell' : 'cells'}
        </Button>
        <Button type="button" onClick={onClose}>
          Leave it
        </Button>
      </div>
    </form>
  )
}
