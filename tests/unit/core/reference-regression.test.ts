/** Solver and weights of the fit against certified and published regressions; each source stands beside its check. */
import { readFileSync } from 'node:fs'
import { describe, expect, test } from 'vitest'
import { factorInPlace, inverseDiagonal, solveInto } from '../../../server/core/fit/cholesky.ts'
import { autocorrelationInflation, huberWeight, studentWeight } from '../../../server/core/fit/noise.ts'
import { seeded } from '../../../sample-logs/simulator/random.ts'

const data = (name: string): number[][] =>
  readFileSync(new URL(`./data/${name}.csv`, import.meta.url), 'utf8')
    .split('\n')
    .filter((line) => line !== '' && !line.startsWith('#'))
    .map((line) => line.split(',').map(Number))

const mean = (values: readonly number[]) => values.reduce((sum, each) => sum + each, 0) / values.length

/** Least squares by the fit's own solver, on columns brought to mean 0 and length 1, as normal equations need. */
function regress(columns: readonly (readonly number[])[], y: readonly number[]) {
  const p = columns.length
  const centres = columns.map(mean)
  const lengths = columns.map((column, k) => Math.hypot(...column.map((value) => value - centres[k]!)))
  const z = columns.map((column, k) => column.map((value) => (value - centres[k]!) / lengths[k]!))
  const dot = (a: readonly number[], b: readonly number[]) => a.reduce((sum, value, i) => sum + value * b[i]!, 0)
  const centreY = mean(y)
  const left = y.map((value) => value - centreY)
  const factor = Float64Array.from({ length: p * p }, (_, i) => dot(z[Math.floor(i / p)]!, z[i % p]!))
  const x = Float64Array.from(z, (column) => dot(column, left))
  expect(factorInPlace(factor, p)).toBe(true)
  solveInto(x, factor, p)
  const residual = left.map((value, i) => value - z.reduce((sum, column, k) => sum + column[i]! * x[k]!, 0))
  const rss = dot(residual, residual)
  const sd = Math.sqrt(rss / (y.length - p - 1))
  const slopes = [...x].map((value, k) => value / lengths[k]!)
  return {
    slopes,
    slopeSds: [...inverseDiagonal(factor, p)].map((value, k) => (sd * Math.sqrt(value)) / lengths[k]!),
    intercept: centreY - dot(slopes, centres),
    sd,
    rSquared: 1 - rss / dot(left, left),
  }
}

test('Longley (NIST StRD, higher difficulty): certified coefficients, their deviations and R squared', () => {
  const rows = data('longley')
  const column = (k: number) => rows.map((row) => row[k]!)
  const { slopes, slopeSds, intercept, sd, rSquared } = regress([1, 2, 3, 4, 5, 6].map(column), column(0))
  const certified = [
    [15.0618722713733, 84.9149257747669],
    [-0.035819179292591, 0.0334910077722432],
    [-2.02022980381683, 0.488399681651699],
    [-1.03322686717359, 0.214274163161675],
    [-0.0511041056535807, 0.22607320006937],
    [1829.15146461355, 455.478499142212],
  ] as const
  certified.forEach(([slope, deviation], k) => {
    expect(slopes[k]! / slope - 1).toBeCloseTo(0, 8)
    expect(slopeSds[k]! / deviation - 1).toBeCloseTo(0, 8)
  })
  expect(intercept / -3482258.63459582 - 1).toBeCloseTo(0, 9)
  expect(sd).toBeCloseTo(304.854073561965, 7)
  expect(rSquared).toBeCloseTo(0.995479004577296, 11)
})

test('ethanol: NOx over mixture, its square and compression (R 4.2.2 lm on lattice’s data)', () => {
  const rows = data('ethanol')
  const mixture = rows.map((row) => row[2]!)
  const { slopes, intercept, rSquared } = regress(
    [mixture, mixture.map((value) => value * value), rows.map((row) => row[1]!)],
    rows.map((row) => row[0]!),
  )
  expect(intercept).toBeCloseTo(-21.203005779, 8)
  ;[52.4110066595, -29.0898994038, 0.0635011235].forEach((value, k) => expect(slopes[k]).toBeCloseTo(value, 8))
  expect(rSquared).toBeCloseTo(0.8237113308, 9)
})

describe('weights', () => {
  // Huber 1964, ψ(u) = u · weight; efficiency at the normal from its definition, numerically: (E ψ′)² / E ψ².
  test('Huber’s bound of 1.5 costs 3.6 % of efficiency where all is normal', () => {
    let slope = 0
    let square = 0
    const step = 1e-3
    for (let u = -9 + step / 2; u < 9; u += step) {
      const density = (Math.exp((-u * u) / 2) / Math.sqrt(2 * Math.PI)) * step
      const psi = u * huberWeight(u)
      slope += density * u * psi
      square += density * psi * psi
    }
    // E ψ′ = E u ψ under the normal (Stein). For k = 1.345 the textbook has 95 %; for 1.5 it is 96.4 % (Huber 1981, from memory).
    expect((slope * slope) / square).toBeCloseTo(0.964, 3)
  })

  test('Student’s t with 4 degrees of freedom: the weight is −(ln density)′ / u', () => {
    const lnDensity = (u: number) => -2.5 * Math.log(1 + (u * u) / 4)
    for (const u of [0.1, 0.7, 1.9, 6, -3]) {
      const slope = (lnDensity(u + 1e-5) - lnDensity(u - 1e-5)) / 2e-5
      expect(studentWeight(u)).toBeCloseTo(-slope / u, 7)
    }
  })
})

test('an AR(1) of rho 0.9 gives a mean as uncertain as its inflation says (400 series, three standard errors)', () => {
  const random = seeded(31)
  const rho = 0.9
  const n = 2000
  const series = () => {
    const out = new Float64Array(n)
    out[0] = random.normal()
    for (let i = 1; i < n; i += 1) out[i] = rho * out[i - 1]! + Math.sqrt(1 - rho ** 2) * random.normal()
    return out
  }
  const drawn = Array.from({ length: 400 }, series)
  const spread = Math.sqrt(mean(drawn.map((each) => mean([...each]) ** 2)))
  const inflation = mean(drawn.slice(0, 40).map((each) => autocorrelationInflation(each, 0.05, 1)))
  const claimed = Math.sqrt(inflation / n)
  // The closed form (1 + rho) / (1 − rho) is 19; the estimate stops at the first lag below 0.03.
  expect(spread / Math.sqrt(19 / n)).toBeGreaterThan(1 - 3 / Math.sqrt(800))
  expect(spread / Math.sqrt(19 / n)).toBeLessThan(1 + 3 / Math.sqrt(800))
  expect(claimed / spread).toBeGreaterThan(0.85)
  expect(claimed / spread).toBeLessThan(1.15)
})
