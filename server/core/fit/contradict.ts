/** Does a log speak of the same engine as the others? A changed sensor, a leak or wrong injector data is asked about. */
import { factorInPlace, forwardInto, solveInto } from './cholesky.ts'
import { priorOf, type PriorParts, type PriorScale } from './prior.ts'
import { gather, solveSystem, type Gathered, type PlacedForm } from './system.ts'

export interface Contradiction {
  /** Chi-square over the cells compared, for each of them: about 1 for logs that agree, NaN where nothing overlaps. */
  readonly perCell: number
  readonly cells: number
}

/** A log knows a cell when it adds this much to its precision (one standard deviation of 2 %). */
const knows = 1 / 0.02 ** 2

/**
 * For each log: its gradient at the others' solution, against what both scatters allow,
 * s' (G + G C G)⁻¹ s over the cells it knows, C the others' posterior. O(logs · n³).
 */
export function contradictions(
  logs: readonly PlacedForm[],
  reference: Float64Array,
  parts: PriorParts,
  scale: PriorScale,
  levelSd: number,
): readonly Contradiction[] {
  if (logs.length < 2) return []
  const prior = priorOf(parts, reference, scale)
  return logs.map((log) => {
    const others = solveSystem(
      gather(
        logs.filter((each) => each !== log),
        reference,
        levelSd,
      ),
      prior,
    )
    return others ? compare(gather([log], others.x, levelSd), others.factor) : { perCell: Number.NaN, cells: 0 }
  })
}

function compare(own: Gathered, othersFactor: Float64Array): Contradiction {
  const { n, cells, pull } = own
  const known: number[] = []
  for (let i = 0; i < n; i += 1) if (cells[i * n + i]! > knows) known.push(i)
  const k = known.length
  if (k === 0) return { perCell: Number.NaN, cells: 0 }
  const entry = (row: number, col: number) => cells[row >= col ? row * n + col : col * n + row]!
  // With C = (L Lᵀ)⁻¹, G C G is WᵀW for W = L⁻¹ G: half the substitutions.
  const spread = new Float64Array(k * k)
  const through = known.map((row) => {
    const column = Float64Array.from({ length: n }, (_, j) => entry(row, j))
    forwardInto(column, othersFactor, n)
    return column
  })
  known.forEach((row, p) => {
    const own = through[p]!
    for (let q = 0; q <= p; q += 1) {
      const other = through[q]!
      let sum = entry(row, known[q]!)
      for (let j = 0; j < n; j += 1) sum += own[j]! * other[j]!
      spread[p * k + q] = sum
    }
    // The cells' own sums are nearly singular where they were only visited together.
    spread[p * k + p]! *= 1 + 1e-6
  })
  const force = Float64Array.from(known, (cell) => pull[cell]!)
  if (!factorInPlace(spread, k)) return { perCell: Number.NaN, cells: k }
  const solved = force.slice()
  solveInto(solved, spread, k)
  let chiSquare = 0
  for (let i = 0; i < k; i += 1) chiSquare += force[i]! * solved[i]!
  return { perCell: chiSquare / k, cells: k }
}
