/** How much one reading is worth: the scatter of the residual, more of it in transients, and its memory. */
import { Role, type Prepared } from '../model/prepare.ts'
import { fading, type Burn, type Prediction } from '../model/forward.ts'

const huberK = 1.5
/** A scatter smaller than this is no measurement's. */
const leastSd = 1e-4
const transientQuantiles = [0.5, 0.75, 0.88, 0.95] as const

/** Weight of a reading by Huber: 1 within 1.5 standard deviations, then falling. @param ratio residual over sd. */
export const huberWeight = (ratio: number): number => Math.min(1, huberK / Math.max(Math.abs(ratio), 1e-12))

/** Student's t with 4 degrees of freedom, as weight; for slow loggers, whose rows are biased now and then. */
export const studentWeight = (ratio: number): number => 5 / (4 + ratio * ratio)

/** Quantiles of more than this many values are taken from every second, third … of them. */
const enough = 20_000

const thinned = (values: Float64Array): Float64Array => {
  const every = Math.ceil(values.length / enough)
  return every > 1
    ? Float64Array.from({ length: Math.floor(values.length / every) }, (_, i) => values[i * every]!)
    : values.slice()
}

/** 1.4826 times the median absolute value: the standard deviation of the normal part. */
export function robustSd(residual: Float64Array): number {
  if (residual.length === 0) return leastSd
  const sorted = thinned(residual).map(Math.abs).sort()
  return Math.max(leastSd, 1.4826 * sorted[sorted.length >> 1]!)
}

/**
 * 1 + 2 Σ autocorrelation up to the first lag below 0.03: residuals that remember each other are worth fewer readings
 * (Sokal's integrated time). Lags up to 3 s; clipped at ±3 sd; between 1 and 2 s over the step.
 * @param dtS time between readings, s.
 */
export function autocorrelationInflation(residual: Float64Array, dtS: number, sd: number, leastLags = 1): number {
  const n = residual.length
  if (n < 50) return 1
  const clipped = residual.map((value) => Math.max(-3 * sd, Math.min(3 * sd, value)))
  const mean = clipped.reduce((sum, value) => sum + value, 0) / n
  let variance = 0
  for (let i = 0; i < n; i += 1) {
    clipped[i]! -= mean
    variance += clipped[i]! ** 2
  }
  let inflation = 1
  const maxLag = Math.min(n - 1, Math.max(leastLags, Math.round(3 / dtS)))
  for (let lag = 1; lag <= maxLag; lag += 1) {
    let sum = 0
    for (let i = lag; i < n; i += 1) sum += clipped[i]! * clipped[i - lag]!
    if (sum / variance < 0.03) break
    inflation += (2 * sum) / variance
  }
  return Math.min(Math.max(1, inflation), Math.max(leastLags, 2 / dtS))
}

/**
 * How fast the air changes at the moment each reading speaks of, |d ln air| per second, smoothed over the sensor's lag.
 * n long.
 */
export function stirOf(prepared: Prepared, burn: Burn, prediction: Prediction, lagS: number): Float64Array {
  const { n, dtS, airPerVe } = prepared
  const rate = new Float64Array(n)
  for (let i = 1; i < n; i += 1) {
    if (dtS[i]! > 0)
      rate[i] = Math.abs(Math.log((airPerVe[i]! * burn.ve[i]!) / (airPerVe[i - 1]! * burn.ve[i - 1]!))) / dtS[i]!
  }
  const stir = new Float64Array(n)
  const fade = fading(lagS)
  for (let i = 0; i < n; i += 1) {
    const arrived = rate[prediction.source[i]!]!
    const keep = i > 0 ? fade(dtS[i]!) : 0
    stir[i] = keep * (i > 0 ? stir[i - 1]! : 0) + (1 - keep) * arrived
  }
  return stir
}

/**
 * Standard deviation of every reading by how stirred the air was: bins at quantiles, RMS in each with residuals clipped
 * at 4 robust sd, never falling with stir. This stands in place of throwing transients away.
 * @param residual drift removed, n long; only samples that speak and are clear count.
 */
export function transientSd(
  prepared: Prepared,
  prediction: Prediction,
  stir: Float64Array,
  residual: Float64Array,
): Float64Array {
  const { n, role } = prepared
  const speaking = new Float64Array(n)
  const stirred = new Float64Array(n)
  let total = 0
  for (let i = 0; i < n; i += 1) {
    if (role[i] !== Role.speaks || prediction.clear[i] === 0) continue
    speaking[total] = residual[i]!
    stirred[total] = stir[i]!
    total += 1
  }
  const order = thinned(stirred.subarray(0, total)).sort()
  const edges = transientQuantiles.map((share) => order[Math.floor(share * order.length)] ?? Infinity)
  const clip = 4 * robustSd(speaking.subarray(0, total))
  const square = new Float64Array(edges.length + 1)
  const count = new Float64Array(edges.length + 1)
  const bins = new Uint8Array(n)
  for (let i = 0; i < n; i += 1) {
    let bin = 0
    while (bin < edges.length && stir[i]! > edges[bin]!) bin += 1
    bins[i] = bin
    if (role[i] !== Role.speaks || prediction.clear[i] === 0) continue
    square[bin]! += Math.min(Math.abs(residual[i]!), clip) ** 2
    count[bin]! += 1
  }
  const sd = new Float64Array(edges.length + 1)
  sd.forEach((_, bin) => {
    const own = count[bin]! > 0 ? Math.sqrt(square[bin]! / count[bin]!) : 0
    sd[bin] = Math.max(own, bin > 0 ? sd[bin - 1]! : leastSd)
  })
  return prepared.warmSd.map((warm, i) => Math.hypot(sd[bins[i]!]!, warm))
}
