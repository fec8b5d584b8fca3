/**
 * What the controller injects with the table it was given, what the engine does with it, and what the logger writes down.
 * Written from the physics; shares nothing with the learner but the grid.
 */
import { valueAt, type Grid } from '../../shared/grid.ts'
import { drive, type Habit } from './driver.ts'
import type { SimulatedEngine } from './engine.ts'
import { seeded } from './random.ts'

export interface SimulationInput {
  readonly engine: SimulatedEngine
  readonly flashed: { readonly grid: Grid; readonly ve: ArrayLike<number> }
  readonly target: { readonly grid: Grid; readonly lambda: ArrayLike<number> }
  readonly habit: Habit
  readonly seconds: number
  readonly rateHz: number
  readonly seed: number
  /** Coolant at the start, °C. */
  readonly startC: number
  readonly hunting?: number
  readonly closedLoop?: boolean
  /** A sensor that sends nothing. */
  readonly dead?: 'iat'
  /** Air that a leak lets into the exhaust before the sensor, kg/s. */
  readonly leakKgS?: number
  /** Dead time the controller reckons with, less the injectors' own, ms. */
  readonly deadTimeErrorMs?: number
  /** False: the controller never cuts fuel on overrun. */
  readonly cutsFuel?: boolean
  /** False takes away noise, drift and the level of the drive: what is left is the physics. */
  readonly noisy?: boolean
}

/** Column title to readings, all the same length. */
export type SimulatedLog = Readonly<Record<string, readonly number[]>>

const gasConstantAir = 287.05
const stepS = 0.01

/** Linear interpolation into a history by a quantity that only grows; the pointer only moves forward. */
function delayed(
  grown: readonly number[],
  values: readonly number[],
  wanted: number,
  from: number,
): { value: number; at: number } {
  let at = from
  while (at + 1 < grown.length - 1 && grown[at + 1]! <= wanted) at += 1
  const span = grown[at + 1]! - grown[at]!
  const share = span > 0 ? Math.min(1, Math.max(0, (wanted - grown[at]!) / span)) : 0
  return { value: values[at]! + share * ((values[at + 1] ?? values[at]!) - values[at]!), at }
}

export function simulate(input: SimulationInput): SimulatedLog {
  const { engine } = input
  const random = seeded(input.seed)
  const moments = drive(engine, input.habit, input.seconds, stepS, input.hunting ?? 0, random)
  const rows: Record<string, number[]> = {}
  const write = (title: string, value: number, places: number) => {
    rows[title] ??= []
    rows[title].push(Number(value.toFixed(places)))
  }
  const scatter = input.noisy === false ? 0 : 1
  const offset = 1 + scatter * 0.005 * random.normal()
  let drift = 0
  let film = 0
  let ect = input.startC
  let trim = 0
  let phiSensor = 1
  let pointer = 0
  const exhaust: number[] = []
  const phis: number[] = []
  let mass = 0
  let cutFor = 0
  const every = Math.round(1 / (input.rateHz * stepS))
  const delaySteps = Math.round(engine.transport.t0S / stepS)

  moments.forEach(({ rpm, mapKpa, tpPct, overrun }, n) => {
    const t = n * stepS
    ect += (88 - ect) * (stepS / 240)
    const iatTrue = 22 + 8 * Math.exp(-rpm / 2500)
    const pulsation = 0.7 * Math.sin(2 * Math.PI * ((rpm / 120) * engine.cylinders) * t)
    // Pressure is sampled a little late and noisily; the controller sees what the sensor says.
    const mapSeen = mapKpa + scatter * (pulsation * 0.4 + 0.25 * random.normal())
    const warm = Math.max(0, (70 - ect) * 0.0045)
    const after = Math.max(0, 0.25 * (1 - t / 20))
    const before = moments[Math.max(0, n - 12)]!
    const accel = Math.max(0, Math.min(0.3, (mapKpa - before.mapKpa - 6) * 0.012))
    const wanted = valueAt(input.target.grid, input.target.lambda, rpm, mapSeen)
    cutFor = overrun && rpm > engine.idleRpm + 350 ? cutFor + stepS : 0
    const cut = input.cutsFuel !== false && cutFor > 0.3
    const ve = valueAt(input.flashed.grid, input.flashed.ve, rpm, mapSeen)
    const perCycle = (mapKpa * engine.displacementL) / (gasConstantAir * (iatTrue + 273.15)) / engine.cylinders
    const airTrueMg = (engine.trueVe(rpm, mapKpa) / 100) * perCycle * 1e6
    const airAssumedMg =
      (ve / 100) * ((mapSeen * engine.displacementL) / (gasConstantAir * (iatTrue + 273.15)) / engine.cylinders) * 1e6
    const multiplier = (1 + warm) * (1 + after) * (1 + accel) * (1 + trim)
    const fuelMg = cut ? 0 : (airAssumedMg / engine.stoichAfr / wanted) * multiplier
    const deliveredMg = cut ? 0 : Math.max(0, fuelMg + (input.deadTimeErrorMs ?? 0) * engine.injector.flowMgPerMs)
    // Wall film on the flow of fuel, mg per second and cylinder.
    const perSecond = rpm / 120
    const flow = deliveredMg * perSecond
    const keep = Math.exp(-stepS / engine.film.tauS)
    film = keep * film + (1 - keep) * engine.film.share * flow
    const flowIn = (1 - engine.film.share) * flow + film
    drift += -drift * (stepS / 40) + 0.007 * Math.sqrt((2 * stepS) / 40) * random.normal()
    const phiPort = ((flowIn / perSecond) * engine.stoichAfr * offset * Math.exp(scatter * drift)) / airTrueMg
    mass += airTrueMg * 1e-6 * perSecond * engine.cylinders * stepS
    exhaust.push(mass)
    phis.push(phiPort)
    const reached = exhaust[Math.max(0, n - delaySteps)]! - engine.transport.massKg
    const found = delayed(exhaust, phis, reached, pointer)
    pointer = Math.max(0, Math.min(found.at, n - 1))
    const exhaustKgS = airTrueMg * 1e-6 * perSecond * engine.cylinders
    const arrived = found.value / (1 + (input.leakKgS ?? 0) / exhaustKgS)
    phiSensor += (1 - Math.exp(-stepS / engine.sensor.lagS)) * (arrived - phiSensor)
    const lambda = 1 / Math.max(phiSensor, 0.2) + scatter * 0.006 * random.normal()
    const shown = Math.min(engine.sensor.high, Math.max(engine.sensor.low, lambda))
    if (input.closedLoop && ect > 60 && !cut && mapKpa < 75)
      trim = Math.max(-0.15, Math.min(0.15, trim + 0.25 * (shown - wanted) * stepS))
    else trim *= 1 - stepS / 2
    if (n % every !== 0) return
    write('Time (s)', t, 2)
    write('Engine speed (rpm)', rpm + scatter * 4 * random.normal(), 0)
    write('MAP (kPa)', mapSeen, 1)
    write('Lambda', shown, 3)
    write('Target lambda', wanted, 3)
    write('ECT (°C)', ect, 0)
    write('IAT (°C)', input.dead === 'iat' ? -40 : iatTrue, 0)
    write('TP (%)', tpPct, 1)
    write('Closed loop trim (%)', 100 * trim, 1)
    write('Warm-up (%)', 100 * warm, 1)
    write('After-start (%)', 100 * after, 1)
    write('Acceleration (%)', 100 * accel, 1)
    write('Pulse width (ms)', cut ? 0 : fuelMg / engine.injector.flowMgPerMs + engine.injector.deadTimeMs, 3)
    write('Battery (V)', 13.9 + 0.05 * random.normal(), 1)
    write('BARO (kPa)', engine.ambientKpa, 1)
  })
  return rows
}

/** The log as its logger writes it: comma, decimal point, LF. */
export function toCsv(log: SimulatedLog): string {
  const titles = Object.keys(log)
  const count = log[titles[0] ?? '']?.length ?? 0
  const lines = [titles.join(',')]
  for (let i = 0; i < count; i += 1) lines.push(titles.map((title) => log[title]![i]).join(','))
  return `${lines.join('\n')}\n`
}
