/** The note on the selected cell: what it is, what is proposed, why, and the decision. */
import { ArrowRight, Shield, TriangleAlert } from 'lucide-react'
import { lazy, Suspense, useState } from 'react'
import type { Proposal } from '../../../shared/contract/proposals.ts'
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { Button } from '../../ui/button.tsx'
import { Facts } from '../../ui/facts.tsx'
import { Status } from '../../ui/status.tsx'
import { DecisionButtons } from './decision-buttons.tsx'
import {
  cellState,
  changePct,
  decideAll,
  hasEvidence,
  setByHand,
  takenValue,
  type CellChange,
  type CellState,
  type Decided,
  type Surface,
} from './decisions.ts'
import { guardSentence, leanerThanGuard, logParts } from './evidence.ts'

/** Charts are fetched when somebody asks for the samples. */
const CellSamples = lazy(() => import('./cell-samples.tsx'))

interface CellCardProps {
  readonly proposal: Proposal & { surface: Surface }
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

export function CellCard({ proposal, decided, cell, cells, mayDecide, handInput, onDecide }: CellCardProps) {
  const { surface } = decided
  const cols = surface.grid.rpm.length
  const rpm = surface.grid.rpm[cell % cols]
  const mapKpa = surface.grid.mapKpa[Math.floor(cell / cols)]
  const state = cellState(decided, cell)
  const current = surface.current[cell] ?? Number.NaN
  const shown = state === 'open' || state === 'held' ? (surface.proposed[cell] ?? current) : takenValue(decided, cell)
  const change = changePct(current, shown)
  const sigma = surface.sigmaPct[cell]
  const held = surface.held.some((entry) => entry.cell === cell)
  const guarded = guardSentence(surface, cell, Number(proposal.settings['stepCapPct'] ?? 20))
  const [isShowing, setIsShowing] = useState(false)
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
          { label: 'Visits', value: formatNumber(surface.visits[cell] ?? 0) },
          { label: 'By the nearest-cell average', value: formatOptional(surface.handNearest[cell]), unit: 'VE' },
          { label: 'By the bilinear average', value: formatOptional(surface.handBilinear[cell]), unit: 'VE' },
          ...((surface.byPulse[cell] ?? null) === null
            ? []
            : [{ label: 'By the fuel delivered', value: formatOptional(surface.byPulse[cell]), unit: 'VE' }]),
        ]}
      />
      <LogParts proposal={proposal} cell={cell} />
      <div className="mt-3.5 mb-4 text-ink-quiet">
        {cells.length > 1 ? (
          <p>{formatNumber(cells.length)} cells are selected; a decision goes to all of them but pinned ones.</p>
        ) : null}
        {state === 'none' ? <p>No log has been here. The value is the one the table came with.</p> : null}
        {guarded ? (
          <p className="mt-1">
            {held ? (
              <span className="flex items-center gap-1.5 font-semibold text-copper">
                <Shield size={14} strokeWidth={2.25} aria-hidden />
                Held
              </span>
            ) : null}
            {guarded}
          </p>
        ) : null}
      </div>
      {(state === 'by-hand' || state === 'pinned') && leanerThanGuard(surface, cell, shown) ? (
        <p className="mb-4 flex gap-1.5 text-copper">
          <TriangleAlert size={14} strokeWidth={2.25} aria-hidden className="mt-1 shrink-0" />
          Leaner at high load than the evidence carries. Lean mixture under load melts pistons.
        </p>
      ) : null}
      {mayDecide ? (
        <DecisionButtons
          {...{ cells, state, decide, handInput, shown }}
          onByHand={(value) =>
            onDecide(
              setByHand(
                decided,
                cells.map((each) => ({ cell: each, value })),
              ),
            )
          }
        />
      ) : (
        <p className="text-ink-quiet">Decisions are the tuner’s; you can read and comment.</p>
      )}
      {hasEvidence(surface, cell) ? (
        <div className="mt-4">
          <Button variant="word" aria-expanded={isShowing} onClick={() => setIsShowing(!isShowing)}>
            {isShowing ? 'Hide the samples' : 'Show the samples behind it'}
          </Button>
          {isShowing ? (
            <Suspense fallback={null}>
              <CellSamples proposal={proposal} cell={cell} />
            </Suspense>
          ) : null}
        </div>
      ) : null}
    </aside>
  )
}

/** Which logs spoke for the cell, and how much each. */
function LogParts({ proposal, cell }: { proposal: Proposal & { surface: Surface }; cell: number }) {
  const parts = logParts(proposal.surface, proposal.logs, cell)
  if (parts.length === 0) return null
  return (
    <ul aria-label="Logs that spoke for this cell" className="mt-3 text-small text-ink-quiet">
      {parts.map(({ log, seconds, share }) => (
        <li key={log.id} className="flex items-center gap-2 py-0.5">
          <span className="w-14 shrink-0">Log {log.number}</span>
          <span aria-hidden className="h-1.5 grow bg-sunk">
            <i className="block h-full bg-ink-faint" style={{ width: `${100 * share}%` }} />
          </span>
          <span className="w-24 shrink-0 text-right">
            {formatNumber(seconds, 1)} s, {formatNumber(100 * share)} %
          </span>
        </li>
      ))}
    </ul>
  )
}

const formatOptional = (value: number | null | undefined): string =>
  value === null || value === undefined ? 'none' : formatNumber(value, 1)
const formatOrDash = (value: number | null | undefined): string =>
  value === null || value === undefined ? 'none' : formatSigned(value, 1)
