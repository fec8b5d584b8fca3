/** The change in figures, and the cells a reviewer should look at before the rest, by risk. Pure. */
import type { ChangeSummary, LookFirst } from '../../../shared/contract/reviews.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { highLoadKpa } from '../../../shared/grid.ts'

/** A jump against a neighbour above this deserves a flag: common practice, no source. */
const steepPct = 9
/** Less evidence than this is thin: common practice, no source. */
const thinS = 5
/** An uncertainty (one standard deviation) above this is wide: common practice, no source. */
const wideSigmaPct = 4
const most = 10

interface Change extends Omit<LookFirst, 'why' | 'note'> {
  readonly highLoad: boolean
  /** Of the mixture: less VE or more lambda. */
  readonly leaner: boolean
  readonly byHand: boolean
  readonly steepestPct: number
}

/** How much steeper the step to a neighbour has become; only what this revision made steeper is its doing. */
function steepestOf({ values, parentValues, grid }: Revision, cell: number): number {
  const cols = grid.rpm.length
  const col = cell % cols
  const neighbours = [col > 0 ? cell - 1 : -1, col + 1 < cols ? cell + 1 : -1, cell - cols, cell + cols]
  const step = (of: readonly (number | null)[], there: number): number | null =>
    of[cell] && of[there] ? Math.abs(of[cell] / of[there] - 1) * 100 : null
  const steps = neighbours.flatMap((there) => {
    const after = step(values, there)
    const before = step(parentValues ?? [], there)
    return after === null || before === null ? [] : [after - Math.max(0, before - 1)]
  })
  return Math.max(0, ...steps)
}

function changesOf(revision: Revision): Change[] {
  const { values, parentValues, grid, provenance, kind } = revision
  if (!parentValues) return []
  const limit = highLoadKpa(grid)
  return values.flatMap((after, cell) => {
    const before = parentValues[cell] ?? null
    if (after === null || before === null || after === before) return []
    const decision = provenance?.decision[cell]
    return [
      {
        cell,
        before,
        after,
        changePct: (after / before - 1) * 100,
        sigmaPct: provenance?.sigmaPct[cell] ?? null,
        evidenceS: provenance?.evidenceS[cell] ?? null,
        highLoad: grid.mapKpa[Math.floor(cell / grid.rpm.length)]! >= limit,
        leaner: kind === 've' ? after < before : after > before,
        byHand: decision === 'by-hand' || decision === 'pinned',
        steepestPct: steepestOf(revision, cell),
      },
    ]
  })
}

const isThin = (change: Change): boolean => (change.evidenceS ?? 0) < thinS

export function changeSummary(revision: Revision): ChangeSummary | null {
  if (!revision.parentValues) return null
  const changes = changesOf(revision)
  const steps = changes.map((each) => each.changePct).sort((a, b) => a - b)
  const count = (test: (change: Change) => boolean) => changes.filter(test).length
  return {
    changed: changes.length,
    leaner: count((each) => each.leaner),
    richer: count((each) => !each.leaner),
    largestPct: steps.reduce((largest, step) => (Math.abs(step) > Math.abs(largest) ? step : largest), 0),
    medianPct: steps[steps.length >> 1] ?? 0,
    highLoad: count((each) => each.highLoad),
    highLoadLeaner: count((each) => each.highLoad && each.leaner),
    thin: count(isThin),
    byHand: count((each) => each.byHand),
    held: revision.provenance?.decision.filter((decision) => decision === 'held').length ?? 0,
  }
}

/** High load first, then size, then hand, then doubt, then steepness; each cell once, at most ten. */
export function lookFirst(revision: Revision): LookFirst[] {
  const changes = changesOf(revision)
  const byMost = (measure: (change: Change) => number) => changes.toSorted((a, b) => measure(b) - measure(a))
  const bySize = byMost((each) => Math.abs(each.changePct))
  const chosen = new Map<number, LookFirst>()
  const add = (some: readonly Change[], why: (change: Change) => string, note: (change: Change) => string) => {
    for (const change of some) {
      if (chosen.has(change.cell) || chosen.size >= most) continue
      const { highLoad: _load, leaner: _lean, byHand: _hand, steepestPct: _steep, ...rest } = change
      chosen.set(change.cell, { ...rest, why: why(change), note: note(change) })
    }
  }
  add(
    bySize.filter((each) => each.leaner && each.highLoad).slice(0, 4),
    () => 'Leaner at high load',
    (each) => (isThin(each) ? 'on thin evidence' : 'lean mixture under load melts pistons'),
  )
  add(
    bySize.slice(0, 1),
    (each) => (each.leaner ? 'The largest change, leaner' : 'The largest change, richer'),
    () => '',
  )
  add(
    bySize.filter((each) => each.byHand).slice(0, 3),
    () => 'Set by hand',
    () => 'not what the surface says',
  )
  add(
    byMost((each) => each.sigmaPct ?? 0)
      .filter((each) => (each.sigmaPct ?? 0) > wideSigmaPct)
      .slice(0, 2),
    () => 'The least certain',
    () => 'wide uncertainty',
  )
  add(
    byMost((each) => each.steepestPct)
      .filter((each) => each.steepestPct > steepPct)
      .slice(0, 3),
    () => 'Steep against its neighbour',
    (each) => `${each.steepestPct.toFixed(0)} % to the next cell`,
  )
  return [...chosen.values()]
}
