/** The cells a reviewer should look at before the rest, by risk. Pure. */
import type { LookFirst } from '../../../shared/contract/reviews.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { highLoadKpa } from '../../../shared/grid.ts'

/** A jump against a neighbour above this deserves a flag: common practice, no source. */
const steepPct = 9
const most = 10

interface Change extends Omit<LookFirst, 'why' | 'note'> {
  readonly mapKpa: number
  readonly byHand: boolean
  readonly steepestPct: number
}

function changesOf(revision: Revision): Change[] {
  const { values, parentValues, grid, provenance } = revision
  if (!parentValues) return []
  const cols = grid.rpm.length
  return values.flatMap((after, cell) => {
    const before = parentValues[cell] ?? null
    if (after === null || before === null || after === before) return []
    const col = cell % cols
    const neighbours = [col > 0 ? cell - 1 : -1, col + 1 < cols ? cell + 1 : -1, cell - cols, cell + cols]
    const steps = neighbours.flatMap((each) => {
      const there = values[each]
      const was = parentValues[each]
      // Only steps that this revision has made steeper are its doing.
      return there && was ? [Math.abs(after / there - 1) * 100 - Math.max(0, Math.abs(before / was - 1) * 100 - 1)] : []
    })
    return [
      {
        cell,
        before,
        after,
        changePct: (after / before - 1) * 100,
        sigmaPct: provenance?.sigmaPct[cell] ?? null,
        evidenceS: provenance?.evidenceS[cell] ?? null,
        mapKpa: grid.mapKpa[Math.floor(cell / cols)]!,
        byHand: provenance?.decision[cell] === 'by-hand' || provenance?.decision[cell] === 'pinned',
        steepestPct: Math.max(0, ...steps),
      },
    ]
  })
}

/** High load first, then size, then hand, then steepness; each cell once, at most ten. */
export function lookFirst(revision: Revision): LookFirst[] {
  const limit = highLoadKpa(revision.grid)
  const changes = changesOf(revision)
  const bySize = changes.toSorted((a, b) => Math.abs(b.changePct) - Math.abs(a.changePct))
  const chosen = new Map<number, LookFirst>()
  const add = (change: Change, why: string, note: string) => {
    if (chosen.has(change.cell) || chosen.size >= most) return
    const { mapKpa: _map, byHand: _hand, steepestPct: _steep, ...rest } = change
    chosen.set(change.cell, { ...rest, why, note })
  }
  for (const change of bySize.filter((each) => each.changePct < 0 && each.mapKpa >= limit).slice(0, 4)) {
    add(
      change,
      'Leaner at high load',
      (change.evidenceS ?? 0) < 5 ? 'on thin evidence' : 'lean mixture under load melts pistons',
    )
  }
  if (bySize[0])
    add(bySize[0], bySize[0].changePct < 0 ? 'The largest change, leaner' : 'The largest change, richer', '')
  for (const change of bySize.filter((each) => each.byHand).slice(0, 3))
    add(change, 'Set by hand', 'not what the surface says')
  for (const change of changes.filter((each) => (each.sigmaPct ?? 0) > 4).slice(0, 2))
    add(change, 'The least certain', 'wide uncertainty')
  for (const change of changes.filter((each) => each.steepestPct > steepPct).slice(0, 3)) {
    add(change, 'Steep against its neighbour', `${change.steepestPct.toFixed(0)} % to the next cell`)
  }
  return [...chosen.values()]
}
