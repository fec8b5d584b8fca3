/** What the decisions on a proposal add up to: values, counts, and the cells a rule would take. Pure. */
import type { Proposal } from '../../../shared/contract/proposals.ts'
import type { CellDecision } from '../../../shared/lifecycle.ts'

export type Surface = NonNullable<Proposal['surface']>

/** A cell as the page speaks of it: the decision, or why there is none to make. */
export type CellState = CellDecision | 'held' | 'none'

export interface CellChange {
  readonly cell: number
  readonly decision: CellDecision
  readonly value?: number
}

export interface Decided {
  readonly surface: Surface
  readonly decisions: readonly CellDecision[]
  readonly byHand: readonly (number | null)[]
}

export const hasEvidence = (surface: Surface, cell: number): boolean => (surface.evidenceS[cell] ?? 0) > 0

export function cellState({ surface, decisions }: Decided, cell: number): CellState {
  const decision = decisions[cell] ?? 'open'
  if (decision !== 'open' && decision !== 'kept') return decision
  if (!hasEvidence(surface, cell)) return 'none'
  if (decision === 'kept') return 'kept'
  return surface.held.some((held) => held.cell === cell) ? 'held' : 'open'
}

/** The value the next revision takes, %: open, held and kept cells keep the current one. */
export function takenValue({ surface, decisions, byHand }: Decided, cell: number): number {
  const current = surface.current[cell] ?? Number.NaN
  const decision = decisions[cell]
  if (decision === 'accepted') return surface.proposed[cell] ?? current
  if (decision === 'by-hand' || decision === 'pinned') return byHand[cell] ?? current
  return current
}

export const changePct = (before: number, after: number): number => (after / before - 1) * 100

export interface Tally {
  readonly accepted: number
  readonly byHand: number
  readonly kept: number
  readonly pinned: number
  readonly held: number
  readonly open: number
  readonly none: number
  /** Cells whose value differs from the current one. */
  readonly changed: number
  /** Largest step, % with its sign, 0 when nothing changes. */
  readonly largestPct: number
}

export function tally(decided: Decided): Tally {
  const counts: Record<CellState, number> = { accepted: 0, 'by-hand': 0, kept: 0, pinned: 0, held: 0, open: 0, none: 0 }
  let changed = 0
  let largestPct = 0
  for (let cell = 0; cell < decided.surface.current.length; cell += 1) {
    counts[cellState(decided, cell)] += 1
    const step = changePct(decided.surface.current[cell] ?? Number.NaN, takenValue(decided, cell))
    // A revision holds one decimal place, so a smaller step is no change.
    if (Math.abs(takenValue(decided, cell) - (decided.surface.current[cell] ?? 0)) >= 0.05) changed += 1
    if (Math.abs(step) > Math.abs(largestPct)) largestPct = step
  }
  const { accepted, kept, pinned, held, open, none } = counts
  return { accepted, byHand: counts['by-hand'], kept, pinned, held, open, none, changed, largestPct }
}

export interface Rule {
  /** Least evidence, s. */
  readonly evidenceS: number
  /** Least change, as a multiple of its own 1-sd uncertainty; 0 takes every change. */
  readonly sigmas: number
}

/** Open cells a rule would accept; held cells are never among them. */
export function cellsByRule(decided: Decided, rule: Rule): number[] {
  const { surface } = decided
  const cells: number[] = []
  for (let cell = 0; cell < surface.current.length; cell += 1) {
    if (cellState(decided, cell) !== 'open') continue
    if ((surface.evidenceS[cell] ?? 0) < rule.evidenceS) continue
    const change = Math.abs(changePct(surface.current[cell] ?? Number.NaN, surface.proposed[cell] ?? Number.NaN))
    if (change >= rule.sigmas * (surface.sigmaPct[cell] ?? Infinity)) cells.push(cell)
  }
  return cells
}

/** The changes that put the cells back to what they are now. */
export function inverseOf(decided: Decided, changes: readonly CellChange[]): CellChange[] {
  return changes.map(({ cell }) => {
    const value = decided.byHand[cell]
    const decision = decided.decisions[cell] ?? 'open'
    return value === null || value === undefined ? { cell, decision } : { cell, decision, value }
  })
}

/** The same decisions with the changes made; used to show them before the server has answered. */
export function applyChanges(decided: Decided, changes: readonly CellChange[]): Decided {
  const decisions = decided.decisions.slice()
  const byHand = decided.byHand.slice()
  for (const { cell, decision, value } of changes) {
    decisions[cell] = decision
    byHand[cell] = value ?? null
  }
  return { surface: decided.surface, decisions, byHand }
}

/** Reads a number typed with a point or a comma; null where it is none. */
export function readNumber(text: string): number | null {
  const value = Number(text.trim().replace(',', '.'))
  return text.trim() === '' || !Number.isFinite(value) ? null : value
}
