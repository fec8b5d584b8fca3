/** Deciding by rule: what to do, the conditions, how many cells they take, and a preview on the grid before it happens. */
import { useEffect, useState } from 'react'
import { formatNumber } from '../../lib/format.ts'
import { Button } from '../../ui/button.tsx'
import { Field, Select } from '../../ui/field.tsx'
import { readNumber } from '../../ui/heatmap/clipboard.ts'
import { cellsByRule, type Decided, type Rule, type RuleAction } from './decisions.ts'

interface DecideByRuleProps {
  readonly decided: Decided
  /** The selected cells, for a rule on those alone. */
  readonly selected: readonly number[]
  readonly onPreview: (cells: readonly number[]) => void
  readonly onDecide: (action: RuleAction, cells: readonly number[]) => void
  readonly onClose: () => void
}

const verbs: Record<RuleAction, { name: string; looksAt: string }> = {
  accepted: { name: 'Accept', looksAt: 'open cells; a held cell is never accepted by rule' },
  kept: { name: 'Keep', looksAt: 'open and held cells' },
  pinned: { name: 'Pin', looksAt: 'open and held cells, and those no log has been in' },
  open: { name: 'Open again', looksAt: 'cells that are decided' },
}

interface Draft {
  readonly action: RuleAction
  readonly evidence: string
  readonly sigmas: string
  readonly most: string
  readonly direction: Rule['direction']
  readonly where: 'table' | 'selection'
}

/** The rule as typed; null while a number is missing. */
function ruleOf(draft: Draft, selected: readonly number[]): Rule | null {
  const evidenceS = readNumber(draft.evidence)
  const sigmas = readNumber(draft.sigmas)
  const mostPct = draft.most.trim() === '' ? Infinity : readNumber(draft.most)
  if (evidenceS === null || sigmas === null || mostPct === null) return null
  if (evidenceS < 0 || sigmas < 0 || mostPct < 0) return null
  const among = draft.where === 'selection' ? new Set(selected) : null
  return { action: draft.action, evidenceS, sigmas, mostPct, direction: draft.direction, among }
}

export function DecideByRule({ decided, selected, onPreview, onDecide, onClose }: DecideByRuleProps) {
  const [draft, setDraft] = useState<Draft>({
    action: 'accepted',
    evidence: '5',
    sigmas: '2',
    most: '',
    direction: 'either',
    where: 'table',
  })
  const rule = ruleOf(draft, selected)
  const cells = rule ? cellsByRule(decided, rule) : []
  const change = (part: Partial<Draft>) => setDraft({ ...draft, ...part })
  const key = cells.join(',')
  useEffect(() => onPreview(key === '' ? [] : key.split(',').map(Number)), [key, onPreview])
  return (
    <form
      aria-label="Decide by rule"
      className="mb-6 border-t-2 border-b border-ink py-4"
      onKeyDown={(event) => {
        if (event.key === 'Escape') onClose()
      }}
      onSubmit={(event) => {
        event.preventDefault()
        onDecide(draft.action, cells)
      }}
    >
      <div className="grid gap-4 sm:grid-cols-3">
        <Select
          label="Decision"
          hint={verbs[draft.action].looksAt}
          autoFocus
          value={draft.action}
          onChange={(event) => {
            const action = event.target.value as RuleAction
            // Keeping and reopening are seldom about what is well known.
            change(action === 'accepted' ? { action } : { action, evidence: '0', sigmas: '0' })
          }}
        >
          {Object.entries(verbs).map(([action, { name }]) => (
            <option key={action} value={action}>
              {name}
            </option>
          ))}
        </Select>
        <Field
          label="Evidence at least"
          hint="seconds of useful data in the cell"
          inputMode="decimal"
          value={draft.evidence}
          onChange={(event) => change({ evidence: event.target.value })}
        />
        <Field
          label="Change at least"
          hint="times its own uncertainty (one standard deviation); 0 takes every change"
          inputMode="decimal"
          value={draft.sigmas}
          onChange={(event) => change({ sigmas: event.target.value })}
        />
        <Field
          label="Change at most"
          hint="%; empty takes every change"
          inputMode="decimal"
          value={draft.most}
          onChange={(event) => change({ most: event.target.value })}
        />
        <Select
          label="Direction"
          value={draft.direction}
          onChange={(event) => change({ direction: event.target.value as Rule['direction'] })}
        >
          <option value="either">Richer or leaner</option>
          <option value="richer">Richer only</option>
          <option value="leaner">Leaner only</option>
        </Select>
        <Select
          label="Where"
          value={draft.where}
          onChange={(event) => change({ where: event.target.value as Draft['where'] })}
        >
          <option value="table">Whole table</option>
          <option value="selection">Selected cells, {formatNumber(selected.length)}</option>
        </Select>
      </div>
      <p role="status" className="mt-3">
        {rule ? ruleSentence(cells.length) : 'Numbers of 0 or above are needed.'}
      </p>
      <div className="mt-3 flex flex-wrap gap-3">
        <Button variant="solid" type="submit" disabled={cells.length === 0}>
          {verbs[draft.action].name} {formatNumber(cells.length)} {cells.length === 1 ? 'cell' : 'cells'}
        </Button>
        <Button type="button" onClick={onClose}>
          Leave it
        </Button>
      </div>
    </form>
  )
}

const ruleSentence = (count: number): string =>
  count === 0
    ? 'No cell meets this.'
    : `${formatNumber(count)} ${count === 1 ? 'cell meets' : 'cells meet'} this, outlined on the grid. Nothing happens before you press the button.`
