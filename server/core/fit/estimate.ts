/** The fit: penalised least squares on ln VE by Gauss-Newton, robust, with the residual's memory counted honestly. */
import type { Observations } from '../evidence/samples.ts'
import { factorInPlace, inverseDiagonal, solveInto } from './cholesky.ts'
import type { Prior } from './prior.ts'

export interface Estimate {
  /** ln VE, n long. */
  readonly x: Float64Array
  /** Posterior standard deviation of ln VE, n long. */
  readonly sigma: Float64Array
  /** Robust standard deviation of the residual, ln. */
  readonly noise: number
  /** How many readings one independent reading is worth. */
  readonly inflation: number
  /** Mean weighted residual of each cell, ln; NaN where nothing speaks. */
  readonly misfit: Float64Array
}

const huberK = 1.5
const passes = 6
/** The grid cannot follow the surface better than this, and one drive's level wanders by about this much. */
const surfaceFloor = 0.004
const driftFloor = 0.006

/** Residual z − ln Σ b exp(x) of every sample of every log, and the four derivatives b v / VE beside it. */
function residualsInto(out: Float64Array, each: Observations, v: Float64Array): void {
  for (let i = 0; i < each.count; i += 1) {
    let ve = 0
    for (let k = 4 * i; k < 4 * i + 4; k += 1) ve += each.weights[k]! * v[each.cells[k]!]!
    out[i] = each.lnVe[i]! - Math.log(ve)
  }
}

/** 1.4826 times the median absolute residual: the standard deviation of the normal part. */
export function robustSd(residuals: readonly Float64Array[]): number {
  const all = new Float64Array(residuals.reduce((sum, each) => sum + each.length, 0))
  let at = 0
  for (const each of residuals) {
    all.set(each, at)
    at += each.length
  }
  for (let i = 0; i < all.length; i += 1) all[i] = Math.abs(all[i]!)
  all.sort()
  return Math.max(1e-4, 1.4826 * (all[all.length >> 1] ?? 0))
}

/**
 * 1 + 2 Σ autocorrelation up to the first lag below 0.03, at most 3 s: residuals that remember each other are worth
 * fewer readings. Clipped at ±3 sd; never below 1.
 */
export function autocorrelationInflation(residual: Float64Array, seconds: number, sd: number): number {
  const n = residual.length
  if (n < 50) return 1
  const clipped = residual.map((value) => Math.max(-3 * sd, Math.min(3 * sd, value)))
  const mean = clipped.reduce((sum, value) => sum + value, 0) / n
  let variance = 0
  for (let i = 0; i < n; i += 1) variance += (clipped[i]! - mean) ** 2
  let inflation = 1
  const maxLag = Math.min(n - 1, Math.max(1, Math.round(3 / Math.max(seconds, 1e-3))))
  for (let lag = 1; lag <= maxLag; lag += 1) {
    let sum = 0
    for (let i = lag; i < n; i += 1) sum += (clipped[i]! - mean) * (clipped[i - lag]! - mean)
    const correlation = sum / variance
    if (correlation < 0.03) break
    inflation += 2 * correlation
  }
  return Math.min(Math.max(1, inflation), Math.max(1, 2 / Math.max(seconds, 1e-3)))
}

/** Adds one log's weighted Gauss-Newton terms. Mutates `a` (n × n, lower triangle) and `b`. O(16 samples). */
function addLogTo(
  a: Float64Array,
  b: Float64Array,
  each: Observations,
  residual: Float64Array,
  v: Float64Array,
  sd: number,
  inflation: number,
): void {
  const n = v.length
  const j = new Float64Array(4)
  for (let i = 0; i < each.count; i += 1) {
    let ve = 0
    for (let k = 0; k < 4; k += 1) ve += each.weights[4 * i + k]! * v[each.cells[4 * i + k]!]!
    for (let k = 0; k < 4; k += 1) j[k] = (each.weights[4 * i + k]! * v[each.cells[4 * i + k]!]!) / ve
    const e = residual[i]!
    const weight = Math.min(1, (huberK * sd) / Math.max(Math.abs(e), 1e-12)) / (sd * sd * inflation)
    for (let p = 0; p < 4; p += 1) {
      const row = each.cells[4 * i + p]!
      b[row]! += weight * j[p]! * e
      for (let q = 0; q < 4; q += 1) {
        const col = each.cells[4 * i + q]!
        if (col <= row) a[row * n + col]! += weight * j[p]! * j[q]!
      }
    }
  }
}

/**
 * Fits ln VE to all logs together. Logs enter as sums, so their order does not matter.
 * @param start  ln of the present table, n long.
 * @param report called after each pass with how many are done.
 * @returns null where the system is not positive definite, which a proper prior rules out.
 */
export function estimate(
  logs: readonly Observations[],
  prior: Prior,
  start: Float64Array,
  report: (done: number, total: number) => void,
): Estimate | null {
  const n = start.length
  let x = start.slice()
  let sd = 0.05
  let inflations = logs.map(() => 1)
  let factor = new Float64Array(0)
  const residuals = logs.map((each) => new Float64Array(each.count))
  for (let pass = 0; pass < passes; pass += 1) {
    const v = x.map(Math.exp)
    logs.forEach((each, l) => residualsInto(residuals[l]!, each, v))
    if (pass > 0) sd = robustSd(residuals)
    if (pass > 1)
      inflations = logs.map((each, l) => autocorrelationInflation(residuals[l]!, each.seconds[0] ?? 0.1, sd))
    factor = prior.precision.slice()
    const b = prior.pull.slice()
    for (let i = 0; i < n; i += 1) for (let k = 0; k < n; k += 1) b[i]! -= prior.precision[i * n + k]! * x[k]!
    logs.forEach((each, l) => addLogTo(factor, b, each, residuals[l]!, v, sd, inflations[l]!))
    if (!factorInPlace(factor, n)) return null
    solveInto(b, factor, n)
    x = x.map((value, i) => value + Math.max(-0.5, Math.min(0.5, b[i]!)))
    report(pass + 1, passes)
  }
  const v = x.map(Math.exp)
  logs.forEach((each, l) => residualsInto(residuals[l]!, each, v))
  const sigma = inverseDiagonal(factor, n).map((variance) => Math.sqrt(variance + surfaceFloor ** 2 + driftFloor ** 2))
  return { x, sigma, noise: sd, inflation: Math.max(...inflations), misfit: meanResidual(logs, residuals, n) }
}

function meanResidual(logs: readonly Observations[], residuals: readonly Float64Array[], n: number): Float64Array {
  const sum = new Float64Array(n)
  const weight = new Float64Array(n)
  logs.forEach((each, l) => {
    for (let i = 0; i < 4 * each.count; i += 1) {
      const share = each.weights[i]! ** 2 * each.seconds[i >> 2]!
      sum[each.cells[i]!]! += share * residuals[l]![i >> 2]!
      weight[each.cells[i]!]! += share
    }
  })
  return sum.map((total, cell) => total / weight[cell]!)
}
