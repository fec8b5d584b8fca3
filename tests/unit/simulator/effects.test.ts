/** Each effect of the simulator against its closed form (ideal gas law, first-order systems, plug flow, Ornstein-Uhlenbeck). */
import { describe, expect, test } from 'vitest'
import type { Moment } from '../../../sample-logs/simulator/driver.ts'
import { dropouts, filmOnWall, firstOrder, pipe, wander } from '../../../sample-logs/simulator/effects.ts'
import type { SimulatedEngine } from '../../../sample-logs/simulator/engine.ts'
import { seeded } from '../../../sample-logs/simulator/random.ts'
import { simulate, undisturbed, type Disturbances } from '../../../sample-logs/simulator/simulate.ts'

const dt = 0.01
const mean = (values: readonly number[]) => values.reduce((sum, each) => sum + each, 0) / values.length
function sdOf(values: readonly number[]): number {
  const centre = mean(values)
  return Math.sqrt(mean(values.map((each) => (each - centre) ** 2)))
}

describe('stages', () => {
  test('film: a step in flow comes as its direct share at once and the rest with the film’s time constant', () => {
    const film = filmOnWall({ share: 0.25, tauS: 0.5 }, dt)
    for (let i = 0; i < 2000; i += 1) film(10)
    let kept = 0
    for (let k = 1; k <= 1000; k += 1) {
      const out = film(14)
      kept += (14 - out) * dt
      expect(out).toBeCloseTo(14 - 4 * 0.25 * Math.exp((-k * dt) / 0.5), 9)
    }
    // What stays on the wall is share × step × time constant; the sum over steps of 10 ms is a hundredth short of it.
    expect(kept / (0.25 * 4 * 0.5)).toBeCloseTo(1, 1)
    expect(kept / (0.25 * 4 * 0.5)).toBeLessThan(1)
  })

  test('a film without share passes everything at once', () => {
    const film = filmOnWall({ share: 0, tauS: 0.5 }, dt)
    expect([film(3), film(7), film(0)]).toEqual([3, 7, 0])
  })

  test.each([0.004, 0.02, 0.08])('plug flow at %s kg/s delays by t0 + mass / flow', (flow) => {
    const through = pipe({ t0S: 0.1, massKg: 2e-3 }, dt)
    // A ramp: what arrives tells when it left.
    let arrived = 0
    for (let i = 0; i < 400; i += 1) arrived = through(i * dt, flow)
    expect(399 * dt - arrived).toBeCloseTo(0.1 + 2e-3 / flow, 9)
  })

  test('plug flow at changing flow: between leaving and arriving the pipe’s mass has passed', () => {
    const through = pipe({ t0S: 0, massKg: 3e-3 }, dt)
    const flowAt = (t: number) => 0.02 + 0.012 * Math.sin(3 * t)
    let mass = 0
    const massAt: number[] = []
    for (let i = 0; i < 600; i += 1) {
      mass += flowAt(i * dt) * dt
      massAt.push(mass)
      const left = through(i, flowAt(i * dt))
      if (mass < 2 * 3e-3) continue
      const lower = Math.floor(left)
      const massThen = massAt[lower]! + (left - lower) * (massAt[lower + 1]! - massAt[lower]!)
      expect(mass - massThen).toBeCloseTo(3e-3, 12)
    }
  })

  test('a sensor’s lag answers a step by 1 − exp(−t / lag); without lag, at once', () => {
    const sensor = firstOrder(0.09, dt, 1)
    for (let k = 1; k <= 60; k += 1) expect(sensor(2)).toBeCloseTo(2 - Math.exp((-k * dt) / 0.09), 9)
    expect(firstOrder(0, dt, 1)(2)).toBe(2)
  })

  test('wander has its standard deviation, and forgets with its memory', () => {
    // 60 000 s are 1500 memories of 40 s: the error of a standard deviation is about 1 / √1500 = 2.6 %.
    const next = wander({ sd: 0.007, tauS: 40 }, 0.1, seeded(9))
    const series = Array.from({ length: 600_000 }, next)
    expect(sdOf(series) / 0.007).toBeGreaterThan(0.92)
    expect(sdOf(series) / 0.007).toBeLessThan(1.08)
    const after40s = mean(series.slice(400).map((value, i) => value * series[i]!)) / sdOf(series) ** 2
    expect(Math.abs(after40s - Math.exp(-1))).toBeLessThan(0.08)
  })

  test('dropouts come as often as asked, 0.2 to 1.2 s long', () => {
    const silent = dropouts(4, dt, seeded(2))
    const spells: number[] = []
    let length = 0
    for (let i = 0; i < 360_000; i += 1) {
      if (silent()) length += dt
      else if (length > 0) {
        spells.push(length)
        length = 0
      }
    }
    // An hour at 4 a minute is 240, less what falls into a spell; Poisson, so ± 3 √240.
    expect(Math.abs(spells.length - 240)).toBeLessThan(3 * Math.sqrt(240) + 12)
    expect(Math.min(...spells)).toBeGreaterThanOrEqual(0.19)
    expect(mean(spells)).toBeCloseTo(0.7, 1)
  })
})

/** Fills evenly at 80 %; table and target are flat, so that every figure follows by hand. */
const engine: SimulatedEngine = {
  displacementL: 2,
  cylinders: 4,
  idleRpm: 800,
  revLimitRpm: 6000,
  ambientKpa: 101,
  topKpa: 100,
  trueVe: () => 80,
  film: { share: 0, tauS: 1 },
  transport: { t0S: 0, massKg: 0 },
  sensor: { lagS: 0, low: 0.65, high: 1.36 },
  injector: { flowMgPerMs: 3, deadTimeMs: 1 },
  stoichAfr: 14.6,
}
const grid = { rpm: [1000, 3000, 3000.1, 5000], mapKpa: [20, 100] }
const seconds = 60
const steadyAt = (rpm: number, mapKpa: number): Moment => ({ rpm, mapKpa, tpPct: 20, overrun: false })
const moments = Array.from({ length: seconds / dt }, () => steadyAt(2400, 66))
interface Run {
  readonly parts?: Partial<SimulatedEngine>
  readonly disturbances?: Partial<Disturbances>
  readonly ve?: readonly number[]
  readonly more?: Partial<Parameters<typeof simulate>[0]>
}
const run = ({ parts = {}, disturbances = {}, ve = Array.from({ length: 8 }, () => 80), more = {} }: Run) =>
  simulate({
    engine: { ...engine, ...parts },
    flashed: { grid, ve },
    target: { grid, lambda: Array.from({ length: 8 }, () => 1) },
    habit: moments,
    seconds,
    rateHz: 100,
    seed: 4,
    startC: 88,
    disturbances: { ...undisturbed, isQuantised: false, ...disturbances },
    ...more,
  })
/** After the enrichment that follows a start. */
const settled = (log: ReturnType<typeof run>, title: string) => log[title]!.slice(25 / dt)

describe('a steady engine with a right table', () => {
  test('reads its target to the last place, and injects what the ideal gas law says', () => {
    const log = run({})
    for (const lambda of settled(log, 'Lambda')) expect(lambda).toBeCloseTo(1, 12)
    // 80 % of 0.5 L at 66 kPa and 22 + 8 exp(−2400 / 2500) °C, over 14.6 and 3 mg/ms, plus 1 ms.
    const kelvin = 273.15 + 22 + 8 * Math.exp(-0.96)
    const pulse = (0.8 * 66 * 0.5 * 1e6) / (287.05 * kelvin) / 14.6 / 3 + 1
    for (const value of settled(log, 'Pulse width (ms)')) expect(value).toBeCloseTo(pulse, 9)
  })

  test('a table 10 % too high reads 1 / 1.1; one far too rich or too lean stands at the sensor’s limit', () => {
    const flat = (value: number) => Array.from({ length: 8 }, () => value)
    expect(settled(run({ ve: flat(88) }), 'Lambda')[0]).toBeCloseTo(1 / 1.1, 12)
    expect(new Set(settled(run({ ve: flat(160) }), 'Lambda'))).toEqual(new Set([0.65]))
    expect(new Set(settled(run({ ve: flat(40) }), 'Lambda'))).toEqual(new Set([1.36]))
  })

  test('a leak of a tenth of the air reads 1.1; a dead time 0.1 ms short gives the fuel of 0.1 ms less', () => {
    const air = (0.8 * 66 * 2 * 20) / (287.05 * (295.15 + 8 * Math.exp(-0.96)))
    expect(settled(run({ more: { leakKgS: air / 10 } }), 'Lambda')[0]).toBeCloseTo(1.1, 9)
    const fuelMs = settled(run({}), 'Pulse width (ms)')[0]! - 1
    const lambda = settled(run({ more: { deadTimeErrorMs: -0.1 } }), 'Lambda')[0]
    expect(lambda).toBeCloseTo(fuelMs / (fuelMs - 0.1), 9)
  })

  test.each([
    ['strokes', { pulsationKpa: 0.5 }, 'MAP (kPa)', 0.5 / Math.SQRT2],
    ['pressure noise', { mapSdKpa: 0.25 }, 'MAP (kPa)', 0.25],
    ['speed noise', { rpmSd: 4 }, 'Engine speed (rpm)', 4],
    ['noise of the wideband', { lambdaSd: 0.006 }, 'Lambda', 0.006],
  ] as const)('%s alone scatters one channel by its standard deviation', (_name, disturbances, title, sd) => {
    // 77 strokes a second: not 80, which a logger at 100 Hz would alias to five values.
    const uneven = Array.from({ length: seconds / dt }, () => steadyAt(2310, 66))
    const log = run({ disturbances, more: { habit: uneven } })
    expect(Math.abs(sdOf(settled(log, title)) / sd - 1)).toBeLessThan(0.05)
    for (const other of ['MAP (kPa)', 'Engine speed (rpm)'])
      if (other !== title) expect(sdOf(settled(log, other)), other).toBeLessThan(1e-9)
    // The controller meters by the pressure it sees; nothing else reaches the mixture.
    if (title === 'Engine speed (rpm)') expect(sdOf(settled(log, 'Lambda'))).toBeLessThan(1e-9)
  })

  test('the level of a drive is one factor for all of it, and scatters over drives by its standard deviation', () => {
    const disturbances = { levelSd: 0.005 }
    // The first reading stands 25 % rich after the start; nothing delays it here.
    const levelOf = (log: ReturnType<typeof run>) => -Math.log(log['Lambda']![0]! * 1.25)
    const log = run({ disturbances })
    for (const lambda of settled(log, 'Lambda')) expect(-Math.log(lambda)).toBeCloseTo(levelOf(log), 12)
    const levels = Array.from({ length: 300 }, (_, seed) =>
      levelOf(run({ disturbances, more: { seed, seconds: 0.1 } })),
    )
    // Three standard errors of 300 draws.
    expect(Math.abs(sdOf(levels) / 0.005 - 1)).toBeLessThan(3 / Math.sqrt(600))
    expect(Math.abs(mean(levels))).toBeLessThan((3 * 0.005) / Math.sqrt(300))
  })

  test('drift alone moves the mixture, slowly', () => {
    const lambda = settled(run({ disturbances: { drift: { sd: 0.007, tauS: 40 } } }), 'Lambda')
    const steps = lambda.slice(1).map((value, i) => value - lambda[i]!)
    // A step of the wander: sd √(2 · step / tau), whatever its course over the minute.
    expect(Math.abs(sdOf(steps) / (0.007 * Math.sqrt((2 * dt) / 40)) - 1)).toBeLessThan(0.06)
  })

  test('places: a channel is written within half its last place, and with them put out it is written whole', () => {
    const noise = { mapSdKpa: 0.25, lambdaSd: 0.006, rpmSd: 4 }
    const whole = run({ disturbances: noise })
    const written = run({ disturbances: { ...noise, isQuantised: true } })
    for (const [title, place] of [
      ['MAP (kPa)', 0.1],
      ['Lambda', 0.001],
      ['Engine speed (rpm)', 1],
    ] as const) {
      const off = whole[title]!.map((value, i) => Math.abs(value - written[title]![i]!))
      expect(Math.max(...off)).toBeLessThanOrEqual(place / 2 + 1e-9)
      expect(Math.max(...off)).toBeGreaterThan(0.4 * place)
    }
  })

  test('dropouts read 0 and change nothing else', () => {
    const with0 = run({ disturbances: { lambdaSd: 0.006, dropoutsPerMin: 20 } })
    const without = run({ disturbances: { lambdaSd: 0.006 } })
    const silent = with0['Lambda']!.filter((value) => value === 0).length
    expect(silent).toBeGreaterThan(100)
    with0['Lambda']!.forEach((value, i) => expect([0, without['Lambda']![i]]).toContain(value))
    expect(with0['MAP (kPa)']).toEqual(without['MAP (kPa)'])
  })
})

describe('the whole way', () => {
  // From 3000 to 3000.1 rpm the table rises by a tenth: the air flow hardly changes, the mixture steps.
  const stepped = Array.from({ length: seconds / dt }, (_, i) => steadyAt(i * dt < 40 ? 3000 : 3000.1, 66))
  const ve = [80, 80, 88, 88, 80, 80, 88, 88]
  const after = (parts: Partial<SimulatedEngine>) => {
    const log = run({ parts, ve, more: { habit: stepped } })
    return (s: number) => 1 / log['Lambda']![Math.round((40 + s) / dt)]!
  }
  const air = (0.8 * 66 * 2 * 25) / (287.05 * (295.15 + 8 * Math.exp(-1.2)))

  test('transport: nothing for t0 + mass / flow, then the whole step', () => {
    const phi = after({ transport: { t0S: 0.1, massKg: 4e-3 } })
    const delay = 0.1 + 4e-3 / air
    expect(delay).toBeGreaterThan(0.2)
    expect(phi(delay - 0.02)).toBeCloseTo(1, 9)
    expect(phi(delay + 0.02)).toBeCloseTo(1.1, 4)
  })

  test('film: 1 − share of the step at once, the rest with its time constant', () => {
    const phi = after({ film: { share: 0.3, tauS: 0.5 } })
    for (const s of [0, 0.2, 0.5, 2]) expect(phi(s)).toBeCloseTo(1 + 0.1 * (1 - 0.3 * Math.exp(-(s + dt) / 0.5)), 4)
  })

  test('film, transport and lag together: both exponentials after the delay', () => {
    const [share, tau, lag] = [0.3, 0.5, 0.1]
    const phi = after({
      film: { share, tauS: tau },
      sensor: { ...engine.sensor, lagS: lag },
      transport: { t0S: 0.1, massKg: 0 },
    })
    // Step response of (1 − share · s tau / (1 + s tau)) / (1 + s lag).
    const response = (t: number) =>
      1 - (share * tau * Math.exp(-t / tau)) / (tau - lag) - (1 - (share * tau) / (tau - lag)) * Math.exp(-t / lag)
    for (const s of [0.1, 0.3, 0.8]) expect(phi(0.1 + s)).toBeCloseTo(1 + 0.1 * response(s + dt / 2), 2)
    expect(phi(0.09)).toBeCloseTo(1, 9)
    expect(phi(0.3)).toBeGreaterThan(1 + 0.09 * response(0.2))
  })
})
