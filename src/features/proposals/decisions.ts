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
  /** Days since the last drive that spoke for each cell. */
  readonly ages?: readonly (number | null)[]
}

const heldCells = new WeakMap<Surface, ReadonlySet<number>>()
function isHeld(surface: Surface, cell: number): boolean {
  let held = heldCells.get(surface)
  if (!held) heldCells.set(surface, (held = new Set(surface.held.map((each) => each.cell))))
  return held.has(cell)
}

export const hasEvidence = (surface: Surface, cell: number): boolean => (surface.evidenceS[cell] ?? 0) > 0

export function cellState({ surface, decisions }: Decided, cell: number): CellState {
  const decision = decisions[cell] ?? 'open'
  if (decision !== 'open' && decision !== 'kept') return decision
  if (!hasEvidence(surface, cell)) return 'none'
  if (decision === 'kept') return 'kept'
  return isHeld(surface, cell) ? 'held' : 'open'
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

/** What a rule can do with the cells that meet it. */
export const ruleActions = ['accepted', 'kept', 'pinned', 'open'] as const
export type RuleAction = (typeof ruleActions)[number]

export interface Rule {
  readonly action: RuleAction
  /** Least evidence, s. */
  readonly evidenceS: number
  /** Least change, as a multiple of its own 1-sd uncertainty; 0 takes every change. */
  readonly sigmas: number
  /** Largest change, %; Infinity takes every change. */
  readonly mostPct: number
  readonly direction: 'either' | 'richer' | 'leaner'
  /** Null for the whole table. */
  readonly among: ReadonlySet<number> | null
}

/** The states a rule looks at: it never accepts a held cell, and only reopening touches what is decided. */
const ruleStates: Record<RuleAction, readonly CellState[]> = {
  accepted: ['open'],
  kept: ['open', 'held'],
  pinned: ['open', 'held', 'none'],
  open: ['accepted', 'kept', 'by-hand', 'pinned'],
}

/** The cells a rule would decide, ascending. A cell that no log has been in changes by 0 and has no uncertainty. */
export function cellsByRule(decided: Decided, rule: Rule): number[] {
  const { surface } = decided
  const cells: number[] = []
  for (let cell = 0; cell < surface.current.length; cell += 1) {
    if (rule.among && !rule.among.has(cell)) continue
    if (!ruleStates[rule.action].includes(cellState(decided, cell))) continue
    if ((surface.evidenceS[cell] ?? 0) < rule.evidenceS) continue
    const change = changePct(surface.current[cell] ?? Number.NaN, surface.proposed[cell] ?? Number.NaN)
    if (rule.direction !== 'either' && Math.sign(change) !== (rule.direction === 'richer' ? 1 : -1)) continue
    if (Math.abs(change) > rule.mostPct) continue
    if (rule.sigmas === 0 || Math.abs(change) >= rule.sigmas * (surface.sigmaPct[cell] ?? Infinity)) cells.push(cell)
  }
  return cells
}

/**
 * One decision for many cells. Accepting leaves out cells without evidence, accepting and keeping leave out pinned
 * ones, pinning holds what the cell has by hand.
 */
export function decideAll(
  { surface, decisions, byHand }: Decided,
  cells: readonly number[],
  decision: Exclude<CellDecision, 'by-hand'>,
): CellChange[] {
  if (decision === 'accepted' || decision === 'kept') {
    return cells
      .filter((cell) => decisions[cell] !== 'pinned' && (decision === 'kept' || hasEvidence(surface, cell)))
      .map((cell) => ({ cell, decision }))
  }
  return cells.map((cell) => {
    const value = decision === 'pinned' ? (byHand[cell] ?? null) : null
    return value === null ? { cell, decision } : { cell, decision, value }
  })
}

/** Values by hand; a pinned cell does not move until its pin is taken off. */
export const setByHand = (
  { decisions }: Decided,
  cells: readonly { readonly cell: number; readonly value: number }[],
): CellChange[] =>
  cells
    .filter(({ cell }) => decisions[cell] !== 'pinned')
    .map(({ cell, value }) => ({ cell, decision: 'by-hand', value }))

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
  return { ...decided, decisions, byHand }
}

/** True where every cell already stands as the changes would leave it. */
export const holds = (
  { decisions, byHand }: Pick<Decided, 'decisions' | 'byHand'>,
  changes: readonly CellChange[],
): boolean =>
  changes.every(
    ({ cell, decision, value }) => decisions[cell] === decision && (byHand[cell] ?? null) === (value ?? null),
  )
