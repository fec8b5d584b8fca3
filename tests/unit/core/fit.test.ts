/** The fit's parts against published values, and the properties that an honest learner has. */
import { CholeskyDecomposition, Matrix } from 'ml-matrix'
import { describe, expect, test } from 'vitest'
import type { Drive, EngineFacts } from '../../../server/core/drive.ts'
import { airFlowKgS } from '../../../server/core/model/airflow.ts'
import { factorInPlace, inverseDiagonal, solveInto } from '../../../server/core/fit/cholesky.ts'
import { autocorrelationInflation, robustSd } from '../../../server/core/fit/noise.ts'
import { guard } from '../../../server/core/fit/guard.ts'
import { priorOf, priorParts } from '../../../server/core/fit/prior.ts'
import { learn, type LearnInput } from '../../../server/core/learn.ts'
import { seeded } from '../../../sample-logs/simulator/random.ts'
import { cornerAt, valueAt, type Grid } from '../../../shared/grid.ts'

describe('bilinear lookup', () => {
  const cell: Grid = { rpm: [2000, 2500], mapKpa: [60, 70] }
  test('a cell’s value at 2200 rpm and 66 kPa is 73.28 (GNU Scientific Library 2.7, gsl_interp2d_bilinear)', () => {
    expect(cornerAt(cell, 2200, 66).weights.map((weight) => Number(weight.toFixed(12)))).toEqual([
      0.24, 0.16, 0.36, 0.24,
    ])
    expect(valueAt(cell, [70, 74, 72, 78], 2200, 66)).toBeCloseTo(73.28, 12)
  })

  const rpm = [500, 1000, 2000, 3000, 4000]
  const mapKpa = [20, 40, 60, 80, 100]
  const z = mapKpa.flatMap((y) => rpm.map((x) => 50 + 0.004 * x + 0.3 * y - 5e-7 * x * x + 2e-6 * x * y))
  test.each([
    [750, 30, 61.7325],
    [1500, 50, 69.9],
    [3500, 95, 86.915],
    [4000, 100, 88.8],
    [500, 20, 57.895],
  ])('at %s rpm and %s kPa it is %s (GNU Octave 7.3 interp2 and SciPy 1.10 agree)', (x, y, value) => {
    expect(valueAt({ rpm, mapKpa }, z, x, y)).toBeCloseTo(value, 9)
  })

  test('weights sum to 1, also outside, where the edge holds', () => {
    for (const [x, y] of [
      [0, 0],
      [9000, 300],
      [1234, 77],
      [500, 100],
    ] as const) {
      expect(cornerAt({ rpm, mapKpa }, x, y).weights.reduce((a, b) => a + b)).toBeCloseTo(1, 12)
    }
    expect(valueAt({ rpm, mapKpa }, z, 9000, 300)).toBeCloseTo(88.8, 9)
  })
})

describe('airflow by the ideal gas law', () => {
  // Derived from R = 287.0475 J/(kg K) (CODATA 2018, CIPM-2007); ours is 287.05, so 2e-5 relative is allowed.
  test.each([
    [85, 60, 2, 3000, 25, 29.79556],
    [80, 35, 1.6, 850, 40, 3.530283],
    [95, 98, 5, 5500, 30, 245.1827],
    [70, 40, 4, 750, 47, 7.61712],
    [100, 101.325, 2, 6000, 15, 122.5023],
  ])('VE %s %%, %s kPa, %s L, %s rpm, %s °C: %s g/s', (ve, map, litres, speed, celsius, grams) => {
    expect((1000 * airFlowKgS(ve, map, litres, speed, celsius)) / grams).toBeCloseTo(1, 4)
  })
})

describe('Cholesky', () => {
  const n = 24
  const random = seeded(8)
  const root = Matrix.from1DArray(
    n,
    n,
    Array.from({ length: n * n }, () => random.normal()),
  )
  const a = root.mmul(root.transpose()).add(Matrix.eye(n, n))
  const b = Array.from({ length: n }, () => random.normal())

  test('solution and variances are those of ml-matrix', () => {
    const l = Float64Array.from(a.to1DArray())
    expect(factorInPlace(l, n)).toBe(true)
    const x = Float64Array.from(b)
    solveInto(x, l, n)
    const oracle = new CholeskyDecomposition(a)
    const expected = oracle.solve(Matrix.columnVector(b)).to1DArray()
    x.forEach((value, i) => expect(value).toBeCloseTo(expected[i]!, 10))
    const inverse = oracle.solve(Matrix.eye(n, n))
    inverseDiagonal(l, n).forEach((value, i) => expect(value).toBeCloseTo(inverse.get(i, i), 10))
  })

  test('a matrix that is not positive definite is refused', () => {
    expect(factorInPlace(Float64Array.from([1, 0, 2, 1]), 2)).toBe(false)
  })
})

describe('noise', () => {
  test('1.4826 times the median absolute residual of seven values with MAD 0.015 (R, stats::mad)', () => {
    expect(robustSd(Float64Array.from([0.015, -0.015, 0.001, 0.02, -0.03, 0.015, -0.014]))).toBeCloseTo(
      1.4826 * 0.015,
      12,
    )
  })

  test('AR(1) with rho 0.9048 is worth about 1 in 20 (Sokal’s sum (1 + rho) / (1 − rho)), within the cap', () => {
    const random = seeded(3)
    const series = new Float64Array(40_000)
    for (let i = 1; i < series.length; i += 1)
      series[i] = 0.9048 * series[i - 1]! + Math.sqrt(1 - 0.9048 ** 2) * random.normal()
    const inflation = autocorrelationInflation(series, 0.05, 1)
    expect(inflation).toBeGreaterThan(15)
    expect(inflation).toBeLessThan(22)
  })

  test('white noise is worth what it counts', () => {
    const random = seeded(4)
    expect(
      autocorrelationInflation(
        Float64Array.from({ length: 20_000 }, () => random.normal()),
        0.05,
        1,
      ),
    ).toBeLessThan(1.15)
  })
})

const grid: Grid = { rpm: [800, 1500, 2500, 3500, 4500], mapKpa: [30, 50, 70, 90] }
const n = 20
const engine: EngineFacts = {
  displacementL: 2,
  cylinders: 4,
  boosted: false,
  lambdaRange: { low: 0.6, high: 1.5 },
  revLimitRpm: 6000,
  stoichAfr: 14.5,
}
const truth = Float64Array.from({ length: n }, (_, i) => 60 + 4 * (i % 5) - 0.6 * (i % 5) ** 2 + 6 * Math.floor(i / 5))

/** A drive that visits what `area` allows, slowly enough that delay plays no part, with noise of the given size. */
function drive(
  id: string,
  seed: number,
  noise: number,
  flashed: Float64Array,
  area = { rpm: [900, 4400], map: [32, 88] },
): Drive {
  const random = seeded(seed)
  const count = 6000
  const column = (value: (i: number) => number) => Float64Array.from({ length: count }, (_, i) => value(i))
  // One second between samples: the transport delay is shorter than the step, and each stands by itself.
  const point = (i: number, low: number, high: number, period: number) =>
    low + (high - low) * (0.5 + 0.5 * Math.sin((2 * Math.PI * Math.floor(i / 2)) / period))
  const rpm = column((i) => point(i, area.rpm[0]!, area.rpm[1]!, 97))
  const mapKpa = column((i) => point(i, area.map[0]!, area.map[1]!, 31.7))
  const lambda = column((i) => {
    const true_ = valueAt(grid, truth, rpm[i]!, mapKpa[i]!)
    return (true_ / valueAt(grid, flashed, rpm[i]!, mapKpa[i]!)) * Math.exp(noise * random.normal())
  })
  return {
    id,
    timeS: column((i) => i * 0.5),
    rpm,
    mapKpa,
    lambda,
    flashed: { grid, ve: flashed },
    target: { grid, lambda: new Float64Array(n).fill(1) },
    targetLambda: new Float64Array(count).fill(1),
  }
}

const current = truth.map((value, i) => value * (1.1 + 0.02 * (i % 3)))
const input = (drives: readonly Drive[]): LearnInput => ({
  drives,
  engine,
  grid,
  current,
  settings: { stepCapPct: 50 },
})
function learned(drives: readonly Drive[]) {
  const result = learn(input(drives))
  if (!result.ok) throw new Error(result.detail)
  return result.proposal
}

describe('learning', () => {
  test('the truth is recovered as noise vanishes', () => {
    const { fitted, hasEvidence } = learned([drive('a', 1, 1e-5, current)])
    fitted.forEach((value, cell) => {
      if (hasEvidence[cell]) expect(Math.abs(value / truth[cell]! - 1)).toBeLessThan(0.006)
    })
  })

  test('the order of the logs does not matter', () => {
    const [a, b] = [drive('a', 1, 0.01, current), drive('b', 2, 0.01, truth)]
    const one = learned([a, b]).fitted
    learned([b, a]).fitted.forEach((value, cell) => expect(value).toBeCloseTo(one[cell]!, 8))
  })

  test('a log added and taken out again restores the answer to the bit', () => {
    const a = drive('a', 1, 0.01, current)
    const before = learned([a])
    learned([a, drive('b', 2, 0.01, truth)])
    expect([...learned([a]).fitted]).toEqual([...before.fitted])
  })

  test('more logs narrow the uncertainty', () => {
    const one = learned([drive('a', 1, 0.03, current)]).sigmaPct
    const three = learned([
      drive('a', 1, 0.03, current),
      drive('b', 2, 0.03, current),
      drive('c', 3, 0.03, current),
    ]).sigmaPct
    one.forEach((sigma, cell) => expect(three[cell]!).toBeLessThanOrEqual(sigma + 1e-9))
  })

  test('a corner nobody visited has no evidence, keeps its value and is the least certain', () => {
    const proposal = learned([drive('a', 1, 0.01, current, { rpm: [900, 2400], map: [32, 60] })])
    const corner = n - 1
    expect(proposal.hasEvidence[corner]).toBe(0)
    expect(proposal.proposed[corner]).toBe(current[corner])
    expect(proposal.sigmaPct[corner]).toBe(Math.max(...proposal.sigmaPct))
  })

  test('a wild reading now and then moves no cell by more than a percent', () => {
    const clean = drive('a', 1, 0.005, current)
    const lambda = clean.lambda.map((value, i) => (i % 41 === 0 ? value * 1.3 : value))
    const one = learned([clean]).fitted
    learned([{ ...clean, lambda }]).fitted.forEach((value, cell) =>
      expect(Math.abs(value / one[cell]! - 1)).toBeLessThan(0.01),
    )
  })

  test('closed-loop trim is undone: a table that reads right only by its trim is still corrected', () => {
    const open = drive('a', 1, 0.002, current)
    const trim = open.lambda.map((value) => value)
    const closed = { ...open, lambda: open.lambda.map(() => 1).map((value, i) => value * (1 + 1e-4 * (i % 7))), trim }
    const want = learned([open]).fitted
    learned([closed]).fitted.forEach((value, cell) => expect(Math.abs(value / want[cell]! - 1)).toBeLessThan(0.02))
  })

  test('the same input gives the same bits', () => {
    const one = learned([drive('a', 1, 0.02, current)])
    const two = learned([drive('a', 1, 0.02, current)])
    expect([...two.fitted]).toEqual([...one.fitted])
    expect([...two.sigmaPct]).toEqual([...one.sigmaPct])
  })
})

describe('refusals', () => {
  const good = drive('a', 1, 0.01, current)
  test.each([
    ['flat pressure', { ...good, mapKpa: good.mapKpa.map(() => 50) }, 'flat-channel', /Manifold pressure never moves/],
    ['flat lambda', { ...good, lambda: good.lambda.map(() => 1) }, 'flat-channel', /Lambda never moves/],
    ['swapped columns', { ...good, rpm: good.mapKpa, mapKpa: good.rpm }, 'swapped', /swapped/],
    [
      'a pegged sensor',
      { ...good, lambda: good.lambda.map((_, i) => (i % 500 === 0 ? 1 : 0.6)) },
      'pegged',
      /end of the sensor/,
    ],
    [
      'axes that do not meet',
      { ...good, mapKpa: good.mapKpa.map((value) => value / 6) },
      'no-overlap',
      /outside the axes/,
    ],
    ['a cold drive', { ...good, ectC: good.rpm.map(() => 20) }, 'too-short', /most was left out as “cold”/],
  ])('%s', (_, bad, reason, words) => {
    const result = learn(input([bad]))
    expect(result).toMatchObject({ ok: false, reason, driveId: 'a' })
    expect(result.ok ? '' : result.detail).toMatch(words)
  })
})

describe('the lean guard', () => {
  const one: Grid = { rpm: [1000, 2000], mapKpa: [40, 100] }
  const base = {
    grid: one,
    current: Float64Array.from([50, 50, 80, 80]),
    evidenceS: new Float64Array(4).fill(2),
    hasEvidence: new Uint8Array(4).fill(1),
    stepCapPct: 20,
  }

  test('at high load it goes leaner only to the rich side of the band; below, it goes all the way', () => {
    const { proposed } = guard({
      ...base,
      fitted: Float64Array.from([45, 45, 72, 72]),
      sigma: new Float64Array(4).fill(0.02),
    })
    expect(proposed[0]).toBe(45)
    expect(proposed[2]).toBeCloseTo(72 * Math.exp(0.02), 10)
  })

  test('a cell whose doubt reaches the current value is held, and says what would release it', () => {
    const { proposed, held } = guard({
      ...base,
      fitted: Float64Array.from([50, 50, 79, 82]),
      sigma: new Float64Array(4).fill(0.03),
    })
    expect(proposed[2]).toBe(80)
    expect(held).toHaveLength(1)
    expect(held[0]).toMatchObject({ cell: 2 })
    expect(held[0]!.releaseS).toBeGreaterThan(2)
    // Richer is taken at once.
    expect(proposed[3]).toBe(82)
  })

  test('no cell steps further than the cap, and a cell without evidence does not move', () => {
    const { proposed } = guard({
      ...base,
      hasEvidence: Uint8Array.from([1, 0, 1, 1]),
      fitted: Float64Array.from([30, 30, 110, 80]),
      sigma: new Float64Array(4).fill(0.001),
    })
    expect([...proposed]).toEqual([40, 50, 96, 80])
  })
})

describe('the prior', () => {
  test('its mean is the flashed table where that is smooth, and it is symmetric and positive definite', () => {
    const flat = new Float64Array(n).fill(Math.log(70))
    const { precision, pull } = priorOf(priorParts(grid), flat, { curvature: 1.25, gradient: 1 })
    for (let i = 0; i < n; i += 1)
      for (let j = 0; j < n; j += 1) expect(precision[i * n + j]).toBeCloseTo(precision[j * n + i]!, 6)
    const l = precision.slice()
    expect(factorInPlace(l, n)).toBe(true)
    const mean = pull.slice()
    solveInto(mean, l, n)
    mean.forEach((value) => expect(value).toBeCloseTo(Math.log(70), 6))
  })
})

describe('the correction by lambda', () => {
  // fuel_new = fuel_old · lambda_measured / lambda_target: the definition of lambda; worked values 84.0 and 82.823529.
  test.each([
    [80, 1.05, 1, 84],
    [80, 0.88, 0.85, 82.823529],
  ])('VE %s read %s where %s was asked becomes %s', (ve, measured, wanted, corrected) => {
    const flashed = new Float64Array(n).fill(ve)
    const still = drive('a', 1, 0, flashed)
    const one: Drive = {
      ...still,
      lambda: still.lambda.map((_, i) => measured * (1 + 1e-5 * (i % 2))),
      targetLambda: still.lambda.map(() => wanted),
    }
    const result = learn({ ...input([one]), current: flashed })
    if (!result.ok) throw new Error(result.detail)
    const { handBilinear, fitted, evidenceS } = result.proposal
    const cell = evidenceS.indexOf(Math.max(...evidenceS))
    expect(handBilinear[cell]).toBeCloseTo(corrected, 2)
    expect(fitted[cell]! / corrected).toBeCloseTo(1, 3)
  })
})
