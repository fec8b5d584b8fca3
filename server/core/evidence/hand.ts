/** The averages a person makes in a spreadsheet, as a check beside the fitted surface. */
import { Role, type Prepared } from '../model/prepare.ts'

/** Sums of one log: what each cell's average is made of; n cells each. */
export interface HandSums {
  /** VE times seconds, % s. */
  readonly sum: Float64Array
  readonly seconds: Float64Array
}

/** The delay people take when they shift the columns against each other by eye. */
const usualShiftS = 0.2
const leastSeconds = 1

/**
 * @param nearest  true: each sample counts wholly for its nearest cell, no delay; false: for four cells by bilinear
 *                 weight, lambda taken from 0.2 s later.
 */
export function handSums(prepared: Prepared, nearest: boolean): HandSums {
  const { n, cells, weights, seconds, asked, lnLambda, role, timeS } = prepared
  const sum = new Float64Array(prepared.cellCount)
  const time = new Float64Array(prepared.cellCount)
  let from = 0
  for (let i = 0; i < n; i += 1) {
    if (role[i] !== Role.speaks) continue
    if (nearest) from = i
    else while (from + 1 < i && timeS[from + 1]! <= timeS[i]! - usualShiftS) from += 1
    const ve = asked[from]! * Math.exp(lnLambda[i]!)
    if (!(ve > 0)) continue
    let best = 4 * from
    for (let k = 4 * from; k < 4 * from + 4; k += 1) {
      if (nearest) best = weights[k]! > weights[best]! ? k : best
      else {
        sum[cells[k]!]! += weights[k]! * seconds[i]! * ve
        time[cells[k]!]! += weights[k]! * seconds[i]!
      }
    }
    if (nearest) {
      sum[cells[best]!]! += seconds[i]! * ve
      time[cells[best]!]! += seconds[i]!
    }
  }
  return { sum, seconds: time }
}

/** Mean VE in every cell over all logs, %; NaN where less than a second speaks. */
export function handAverage(logs: readonly HandSums[], n: number): Float64Array {
  const out = new Float64Array(n)
  for (let cell = 0; cell < n; cell += 1) {
    let sum = 0
    let seconds = 0
    for (const log of logs) {
      sum += log.sum[cell]!
      seconds += log.seconds[cell]!
    }
    out[cell] = seconds >= leastSeconds ? sum / seconds : Number.NaN
  }
  return out
}
