/** The averages a person makes in a spreadsheet, as a check beside the fitted surface. */
import type { Observations } from './samples.ts'

/**
 * Mean VE in every cell, %; NaN where less than a second speaks.
 * @param nearest  true: each sample counts wholly for its nearest cell; false: for four cells by bilinear weight.
 */
export function handAverage(observations: readonly Observations[], n: number, nearest: boolean): Float64Array {
  const sum = new Float64Array(n)
  const time = new Float64Array(n)
  for (const each of observations) {
    for (let i = 0; i < each.count; i += 1) {
      let best = 4 * i
      for (let k = 4 * i; k < 4 * i + 4; k += 1) {
        if (nearest) {
          if (each.weights[k]! > each.weights[best]!) best = k
        } else {
          const share = each.weights[k]! * each.seconds[i]!
          sum[each.cells[k]!]! += share * Math.exp(each.lnVe[i]!)
          time[each.cells[k]!]! += share
        }
      }
      if (nearest) {
        sum[each.cells[best]!]! += each.seconds[i]! * Math.exp(each.lnVe[i]!)
        time[each.cells[best]!]! += each.seconds[i]!
      }
    }
  }
  return sum.map((total, cell) => (time[cell]! >= 1 ? total / time[cell]! : Number.NaN))
}
