/** The estimator's parts against published data and reference programs; each source stands beside its check. */
import { readFileSync } from 'node:fs'
import { describe, expect, test } from 'vitest'
import { weightedLine } from '../../../server/core/diagnose.ts'
import { factorInPlace, solveInto } from '../../../server/core/fit/cholesky.ts'
import { autocorrelationInflation, huberWeight, robustSd } from '../../../server/core/fit/noise.ts'
import { priorParts } from '../../../server/core/fit/prior.ts'
import { seeded } from '../../../sample-logs/simulator/random.ts'
import { cornerAt, type Grid } from '../../../shared/grid.ts'

const data = (name: string): number[][] =>
  readFileSync(new URL(`./data/${name}.csv`, import.meta.url), 'utf8')
    .split('\n')
    .filter((line) => line !== '' && !line.startsWith('#'))
    .map((line) => line.split(',').map(Number))

function solved(a: Float64Array, b: Float64Array): Float64Array {
  const factor = a.slice()
  const x = b.slice()
  expect(factorInPlace(factor, b.length)).toBe(true)
  solveInto(x, factor, b.length)
  return x
}

/** The prior's penalties are scaled by a standard deviation of 0.04 at the reference spacing; this takes it out again. */
const unscale = 0.04 ** 2

describe('a weighted straight line', () => {
  test('x 1 to 5 with weights 1 1 2 2 4 (R 4.2.2 lm and ml-matrix agree)', () => {
    const line = weightedLine([1, 2, 3, 4, 5], [2.1, 3.9, 6.2, 7.8, 10.1], [1, 1, 2, 2, 4])
    const meanX = (1 + 2 + 6 + 8 + 20) / 10
    expect(line.slope).toBeCloseTo(2.00110497238, 10)
    expect(line.level - line.slope * meanX).toBeCloseTo(0.0359116022099, 10)
  })

  test('Norris (NIST StRD): certified slope, intercept and R squared', () => {
    const rows = data('norris')
    expect(rows).toHaveLength(36)
    const x = rows.map(([, value]) => value!)
    const line = weightedLine(
      x,
      rows.map(([value]) => value!),
      x.map(() => 1),
    )
    const meanX = x.reduce((sum, value) => sum + value, 0) / x.length
    expect(line.slope).toBeCloseTo(1.00211681802045, 11)
    expect(line.level - line.slope * meanX).toBeCloseTo(-0.262323073774029, 9)
    expect(line.explained).toBeCloseTo(0.999993745883712, 12)
  })
})

describe('robust weights', () => {
  const values = [1.01, 1.02, 0.99, 1.0, 1.03, 0.98, 1.01, 1.6]
  const median = 1.01

  test('1.4826 MAD of eight readings with one wild one is 0.022239 (R stats::mad)', () => {
    // R takes the mean of the middle two; the median of an even count here is the upper one, so one middle value is doubled.
    const away = values.map((value) => value - median)
    expect(robustSd(Float64Array.from([...away, 0.015]))).toBeCloseTo(0.022239, 6)
  })

  test('Huber location with k = 1.5 is 1.01047977 (R MASS::huber)', () => {
    const sd = 0.022239
    let centre = median
    for (let round = 0; round < 200; round += 1) {
      const weights = values.map((value) => huberWeight((value - centre) / sd))
      const total = weights.reduce((sum, weight) => sum + weight, 0)
      centre = values.reduce((sum, value, i) => sum + weights[i]! * value, 0) / total
    }
    // R stops where a step is below 1e-6 of the scale.
    expect(centre).toBeCloseTo(1.01047977107, 7)
  })
})

describe('effective sample size', () => {
  // AR(1): n_eff = n (1 − rho) / (1 + rho), a textbook result (Sokal); rho of a 20 Hz log with 0.5 s memory is 0.9048.
  test.each([
    [0.5, 3],
    [0.8, 9],
    [0.9048, 20.0084],
  ])('rho %s is worth one reading in %s', (rho, expected) => {
    const random = seeded(17)
    const series = new Float64Array(200_000)
    for (let i = 1; i < series.length; i += 1)
      series[i] = rho * series[i - 1]! + Math.sqrt(1 - rho ** 2) * random.normal()
    // The sum stops where the autocorrelation falls below 0.03 and readings beyond 3 sd are clipped: a little is lost.
    const found = autocorrelationInflation(series, 0.05, 1)
    expect(found / expected).toBeGreaterThan(0.9)
    expect(found / expected).toBeLessThan(1.05)
  })
})

describe('penalties', () => {
  test('Whittaker smoother, second differences, lambda 10, ten points', () => {
    // One row of a table 420 rpm apart is the smoother; the second row knows nothing of the first.
    const grid: Grid = { rpm: Array.from({ length: 10 }, (_, i) => 420 * (i + 1)), mapKpa: [40, 60] }
    const { curvature } = priorParts(grid)
    const noise = [0.5, -0.3, 0.2, -0.1, 0.4, -0.5, 0.3, -0.2, 0.1, -0.4]
    const y = Float64Array.from({ length: 20 }, (_, i) => (i % 10) ** 2 + noise[i % 10]!)
    const a = curvature.map((value) => 10 * unscale * value)
    for (let i = 0; i < 20; i += 1) a[i * 20 + i]! += 1
    const published = [
      -4.22420515, 0.21468007, 5.12598581, 11.03066457, 18.35707028, 27.32049042, 37.94050542, 49.95464669, 62.93639509,
      76.34376681,
    ]
    const smooth = solved(a, y)
    published.forEach((value, i) => expect(smooth[i]).toBeCloseTo(value, 6))
  })

  const cells = [60, 62, 65, 66, 64, Number.NaN, 70, 71, 70, 75, Number.NaN, 80, 72, 78, 83, 85]
  const holed = (penalty: number) => {
    const { gradient } = priorParts({ rpm: [1000, 2000, 3000, 4000], mapKpa: [40, 60, 80, 100] })
    const a = gradient.map((value) => penalty * unscale * value)
    const b = new Float64Array(16)
    cells.forEach((value, i) => {
      if (Number.isNaN(value)) return
      a[i * 16 + i]! += 1
      b[i] = value
    })
    return solved(a, b)
  }

  test('a table with two holes: with a vanishing penalty they are the means of their neighbours, 67.75 and 77', () => {
    const x = holed(1e-7)
    expect(x[5]).toBeCloseTo(67.75, 4)
    expect(x[10]).toBeCloseTo(77, 4)
    cells.forEach((value, i) => {
      if (!Number.isNaN(value)) expect(x[i]).toBeCloseTo(value, 4)
    })
  })

  test('the same with penalty 0.5: 68.476736, 75.358315 and 62.542888 (Gaussian Markov field, R 4.2.2)', () => {
    const x = holed(0.5)
    expect([x[5], x[10], x[0]].map((value) => Number(value!.toFixed(6)))).toEqual([68.476736, 75.358315, 62.542888])
  })
})

describe('the ethanol engine (Brinkman, SAE Transactions 90, 1981; 88 readings of NOx over mixture and compression)', () => {
  const rows = data('ethanol')
  const grid: Grid = { rpm: [7.5, 12, 18], mapKpa: [0.5, 0.7, 0.9, 1.1, 1.3] }
  const fit = (penalty: number) => {
    const a = priorParts(grid).gradient.map((value) => penalty * unscale * value)
    const b = new Float64Array(15)
    for (const [nox, compression, mixture] of rows as [number, number, number][]) {
      const { cells, weights } = cornerAt(grid, compression, mixture)
      cells.forEach((row, p) => {
        b[row]! += weights[p]! * nox
        cells.forEach((col, q) => (a[row * 15 + col]! += weights[p]! * weights[q]!))
      })
    }
    const x = solved(a, b)
    const left = rows.map(([nox, compression, mixture]) => {
      const { cells, weights } = cornerAt(grid, compression!, mixture!)
      return nox! - cells.reduce((sum, cell, k) => sum + weights[k]! * x[cell]!, 0)
    })
    return { x, rss: left.reduce((sum, value) => sum + value * value, 0) }
  }

  test('least squares on the table’s own basis, without a prior (R 4.2.2 lm): negative NOx where data are poor', () => {
    const { x, rss } = fit(0)
    expect(rows).toHaveLength(88)
    expect(rss).toBeCloseTo(3.412704251, 8)
    const published = [
      -0.2832118928, -0.4300042756, 0.3026952124, 0.9549668962, 1.7434889274, 1.853690954, 3.7013138803, 4.2145107158,
      5.2712950188, 1.603294633, 1.5504486187, 1.3896373878, -0.1093877306, -0.1856140991, 0.1431247568,
    ]
    x.forEach((value, i) => expect(value).toBeCloseTo(published[i]!, 8))
  })

  test('with first differences penalised by 1 (R 4.2.2 solve): all positive, corners drawn to their neighbours', () => {
    const { x, rss } = fit(1)
    expect(rss).toBeCloseTo(18.9915267, 6)
    const published = [
      0.7681830657, 0.7404906051, 0.8219575399, 1.3261356843, 1.7331158993, 2.1079049833, 3.1939230194, 3.4455234612,
      3.5935979141, 1.6507474609, 1.6834166391, 1.7431737526, 0.6340115383, 0.5737127091, 0.4981733001,
    ]
    x.forEach((value, i) => expect(value).toBeCloseTo(published[i]!, 8))
  })
})
