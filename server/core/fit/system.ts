/** Forms and prior put together: the normal equations of all logs, their solution and the evidence for a prior. */
import { factorInPlace, solveInto } from './cholesky.ts'
import type { QuadraticForm } from './drift.ts'
import { priorOf, type Prior, type PriorParts, type PriorScale } from './prior.ts'

/** A log's form with the point it was linearised at, ln VE, n. */
export interface PlacedForm {
  readonly form: QuadraticForm
  readonly at: Float64Array
}

/** All logs as one quadratic form around `reference`. */
export interface Gathered {
  readonly n: number
  readonly reference: Float64Array
  /** n × n, row-major, lower triangle. */
  readonly cells: Float64Array
  /** n. */
  readonly pull: Float64Array
  readonly lnEvidence: number
}

/** y += scale · S x for a symmetric S whose lower triangle is stored. */
export function addSymmetricTimes(y: Float64Array, s: Float64Array, x: Float64Array, scale: number): void {
  const n = x.length
  for (let row = 0; row < n; row += 1) {
    let sum = s[row * n + row]! * x[row]!
    const own = scale * x[row]!
    for (let col = 0; col < row; col += 1) {
      const value = s[row * n + col]!
      if (value === 0) continue
      sum += value * x[col]!
      y[col]! += value * own
    }
    y[row]! += scale * sum
  }
}

const dot = (a: Float64Array, b: Float64Array): number => {
  let sum = 0
  for (let i = 0; i < a.length; i += 1) sum += a[i]! * b[i]!
  return sum
}

/** Sums the logs afresh, each with its own level eliminated; subtracting one from a sum would leave residue. O(logs · n²). */
export function gather(logs: readonly PlacedForm[], reference: Float64Array, levelSd: number): Gathered {
  const n = reference.length
  const cells = new Float64Array(n * n)
  const pull = new Float64Array(n)
  let lnEvidence = 0
  for (const { form, at } of logs) {
    const denominator = form.levelWeight + 1 / levelSd ** 2
    lnEvidence +=
      form.lnEvidence + 0.5 * (form.levelPull ** 2 / denominator - Math.log(1 + levelSd ** 2 * form.levelWeight))
    const own = form.cells.slice()
    for (let row = 0; row < n; row += 1) {
      const share = form.level[row]! / denominator
      if (share !== 0) for (let col = 0; col <= row; col += 1) own[row * n + col]! -= share * form.level[col]!
    }
    const force = form.pull.map((value, i) => value - (form.level[i]! * form.levelPull) / denominator)
    const step = reference.map((value, i) => value - at[i]!)
    const moved = force.slice()
    addSymmetricTimes(moved, own, step, -1)
    lnEvidence += 0.5 * (dot(force, step) + dot(moved, step))
    for (let i = 0; i < n; i += 1) pull[i]! += moved[i]!
    for (let i = 0; i < cells.length; i += 1) cells[i]! += own[i]!
  }
  return { n, reference, cells, pull, lnEvidence }
}

export interface Solution {
  /** ln VE, n. */
  readonly x: Float64Array
  /** Cholesky factor of the posterior precision, n × n, lower triangle. */
  readonly factor: Float64Array
  readonly lnEvidence: number
}

const lnDet = (factor: Float64Array, n: number): number => {
  let sum = 0
  for (let i = 0; i < n; i += 1) sum += 2 * Math.log(factor[i * n + i]!)
  return sum
}

/** @returns null where the system is not positive definite, which a proper prior rules out. O(n³ / 3). */
export function solveSystem(gathered: Gathered, prior: Prior): Solution | null {
  const { n, reference } = gathered
  const lean = prior.pull.slice()
  addSymmetricTimes(lean, prior.precision, reference, -1)
  const priorFactor = prior.precision.slice()
  const factor = prior.precision.map((value, i) => value + gathered.cells[i]!)
  if (!factorInPlace(priorFactor, n) || !factorInPlace(factor, n)) return null
  const force = gathered.pull.map((value, i) => value + lean[i]!)
  const step = force.slice()
  solveInto(step, factor, n)
  const mean = lean.slice()
  solveInto(mean, priorFactor, n)
  const fit = 0.5 * (dot(force, step) - dot(lean, mean) - lnDet(factor, n) + lnDet(priorFactor, n))
  return { x: reference.map((value, i) => value + step[i]!), factor, lnEvidence: gathered.lnEvidence + fit }
}

const curvatures = [0.7, 1, 1.5, 2.2, 3.2, 4.6, 6.6]
const gradients = [0.6, 1, 1.6, 2.5, 4]

/** ln of the belief in a prior's scales themselves: log-normal around the usual ones. */
const scaleBelief = ({ curvature, gradient }: PriorScale): number =>
  -((Math.log(curvature / 1.2) / 0.5) ** 2) / 2 - (Math.log(gradient) / 0.5) ** 2 / 2

/**
 * The prior's scales by evidence: from the usual ones uphill to the best neighbour on a grid of scales. The evidence has
 * one hump in all cases seen, and a walk costs a tenth of the whole grid.
 */
export function choosePrior(
  parts: PriorParts,
  base: Float64Array,
  gathered: Gathered,
): { scale: PriorScale; solution: Solution } | null {
  const seen = new Map<string, { scale: PriorScale; solution: Solution; score: number } | null>()
  const at = (c: number, g: number) => {
    const curvature = curvatures[c]
    const gradient = gradients[g]
    if (curvature === undefined || gradient === undefined) return null
    const key = `${c} ${g}`
    if (!seen.has(key)) {
      const scale = { curvature, gradient }
      const solution = solveSystem(gathered, priorOf(parts, base, scale))
      seen.set(key, solution && { scale, solution, score: solution.lnEvidence + scaleBelief(scale) })
    }
    return seen.get(key) ?? null
  }
  let c = 1
  let g = 1
  let best = at(c, g)
  for (;;) {
    const around = [
      [c + 1, g],
      [c - 1, g],
      [c, g + 1],
      [c, g - 1],
    ] as const
    const next = around
      .map(([nc, ng]) => ({ nc, ng, found: at(nc, ng) }))
      .reduce((top, each) => ((each.found?.score ?? -Infinity) > (top.found?.score ?? -Infinity) ? each : top))
    if (!next.found || next.found.score <= (best?.score ?? -Infinity)) return best
    best = next.found
    c = next.nc
    g = next.ng
  }
}
