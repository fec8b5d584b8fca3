/** The lean guard: at high load no cell goes leaner than the rich side of what the evidence carries. */
import { highLoadKpa, type Grid } from '../../../shared/grid.ts'

export interface HeldCell {
  readonly cell: number
  readonly reason: string
  /** About how many more useful seconds would release it; null where that cannot be told. */
  readonly releaseS: number | null
}

export interface Guarded {
  /** VE in %, n long. */
  readonly proposed: Float64Array
  readonly held: readonly HeldCell[]
}

export interface GuardInput {
  readonly grid: Grid
  readonly current: Float64Array
  readonly fitted: Float64Array
  /** Standard deviation of ln VE. */
  readonly sigma: Float64Array
  readonly evidenceS: Float64Array
  readonly hasEvidence: Uint8Array
  /** Largest step of one revision, %. */
  readonly stepCapPct: number
}

/** Applies guard and step cap; cells without evidence keep their current value. */
export function guard(input: GuardInput): Guarded {
  const { grid, current, fitted, sigma, evidenceS, hasEvidence } = input
  const proposed = current.slice()
  const held: HeldCell[] = []
  const limit = highLoadKpa(grid)
  for (let cell = 0; cell < current.length; cell += 1) {
    if (!hasEvidence[cell]) continue
    const now = current[cell]!
    const want = fitted[cell]!
    const isHighLoad = grid.mapKpa[Math.floor(cell / grid.rpm.length)]! >= limit
    let value = want
    if (isHighLoad && want < now) {
      const rich = want * Math.exp(sigma[cell]!)
      value = Math.min(now, rich)
      if (rich >= now) {
        const needed = Math.log(now / want)
        const more = evidenceS[cell]! * ((sigma[cell]! / needed) ** 2 - 1)
        held.push({
          cell,
          reason: `Leaner at high load on ${evidenceS[cell]!.toFixed(1)} s of evidence: the fit says ${want.toFixed(1)}, and its doubt reaches the current ${now.toFixed(1)}.`,
          releaseS: Number.isFinite(more) && more < 3600 ? Math.max(1, more) : null,
        })
      }
    }
    const cap = input.stepCapPct / 100
    proposed[cell] = Math.min(now * (1 + cap), Math.max(now * (1 - cap), value))
  }
  return { proposed, held }
}
