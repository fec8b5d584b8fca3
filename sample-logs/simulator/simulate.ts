/**
 * What the controller injects with the table it was given, what the engine does with it, and what the logger writes down.
 * Written from the physics; shares nothing with the learner but the grid.
 */
import { valueAt, type Grid } from '../../shared/grid.ts'
import { drive, type Habit, type Moment } from './driver.ts'
import { dropouts, filmOnWall, firstOrder, pipe, wander } from './effects.ts'
import type { SimulatedEngine } from './engine.ts'
import { seeded, type Random } from './random.ts'

/** What makes readings differ from the physics; each can be put out by itself, the others keep their draws. */
export interface Disturbances {
  /** Fuel delivered in this drive against all others, standard deviation of its ln. */
  readonly levelSd: number
  /** Slow wander of the fuel delivered, ln. */
  readonly drift: { readonly sd: number; readonly tauS: number }
  /** Amplitude that the strokes leave on the pressure signal, kPa. */
  readonly pulsationKpa: number
  /** Standard deviations of single readings. */
  readonly mapSdKpa: number
  readonly rpmSd: number
  readonly lambdaSd: number
  /** Spells a minute in which the wideband says nothing and its column reads 0. */
  readonly dropoutsPerMin: number
  /** Readings are written with the places their channel has; false writes all of them. */
  readonly isQuantised: boolean
}

export const usualDisturbances: Disturbances = {
  levelSd: 0.005,
  drift: { sd: 0.007, tauS: 40 },
  pulsationKpa: 0.28,
  mapSdKpa: 0.25,
  rpmSd: 4,
  lambdaSd: 0.006,
  dropoutsPerMin: 0,
  isQuantised: true,
}

/** The physics alone, and the places of the channels. */
export const undisturbed: Disturbances = {
  ...usualDisturbances,
  levelSd: 0,
  drift: { sd: 0, tauS: 40 },
  pulsationKpa: 0,
  mapSdKpa: 0,
  rpmSd: 0,
  lambdaSd: 0,
}

export interface SimulationInput {
  readonly engine: SimulatedEngine
  readonly flashed: { readonly grid: Grid; readonly ve: ArrayLike<number> }
  readonly target: { readonly grid: Grid; readonly lambda: ArrayLike<number> }
  /** Who drives; or the moments themselves, one every 10 ms. */
  readonly habit: Habit | readonly Moment[]
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
  /** What differs from the usual ones. */
  readonly disturbances?: Partial<Disturbances>
}

/** Column title to readings, all the same length. */
export type SimulatedLog = Readonly<Record<string, readonly number[]>>

const gasConstantAir = 287.05
const stepS = 0.01

/** Air of one cylinder and cycle at a VE, mg (ideal gas law). */
const fillingMg = (engine: SimulatedEngine, vePct: number, mapKpa: number, intakeC: number): number =>
  (vePct / 100) * ((mapKpa * engine.displacementL) / (gasConstantAir * (intakeC + 273.15)) / engine.cylinders) * 1e6

function momentsOf(input: SimulationInput, random: Random): readonly Moment[] {
  const { habit, engine, seconds, hunting } = input
  return typeof habit === 'string'
    ? drive(engine, habit, seconds, stepS, hunting ?? 0, random)
    : habit.slice(0, Math.round(seconds / stepS))
}

/** Corrections on top of the table, as factors less 1. */
function enrichments(moments: readonly Moment[], n: number, ect: number) {
  const before = moments[Math.max(0, n - 12)]!
  return {
    warm: Math.max(0, (70 - ect) * 0.0045),
    after: Math.max(0, 0.25 * (1 - (n * stepS) / 20)),
    accel: Math.max(0, Math.min(0.3, (moments[n]!.mapKpa - before.mapKpa - 6) * 0.012)),
  }
}

export function simulate(input: SimulationInput): SimulatedLog {
  const { engine } = input
  const random = seeded(input.seed)
  const moments = momentsOf(input, random)
  const disturbed = { ...usualDisturbances, ...input.disturbances }
  const rows: Record<string, number[]> = {}
  const write = (title: string, value: number, places: number) => {
    rows[title] ??= []
    rows[title].push(disturbed.isQuantised ? Number(value.toFixed(places)) : value)
  }
  const level = 1 + disturbed.levelSd * random.normal()
  const film = filmOnWall(engine.film, stepS)
  const exhaust = pipe(engine.transport, stepS)
  const sensor = firstOrder(engine.sensor.lagS, stepS, 1)
  const drift = wander(disturbed.drift, stepS, random)
  // Draws of its own: a log with dropouts is otherwise the log without.
  const isSilent = dropouts(disturbed.dropoutsPerMin, stepS, seeded(input.seed + 500_000))
  let ect = input.startC
  let trim = 0
  let cutFor = 0
  const every = Math.round(1 / (input.rateHz * stepS))

  moments.forEach(({ rpm, mapKpa, tpPct, overrun }, n) => {
    const t = n * stepS
    ect += (88 - ect) * (stepS / 240)
    const iatTrue = 22 + 8 * Math.exp(-rpm / 2500)
    const strokes = Math.sin(2 * Math.PI * ((rpm / 120) * engine.cylinders) * t)
    // The controller sees what the sensor says, strokes and noise and all.
    const mapSeen = mapKpa + disturbed.pulsationKpa * strokes + disturbed.mapSdKpa * random.normal()
    const { warm, after, accel } = enrichments(moments, n, ect)
    const wanted = valueAt(input.target.grid, input.target.lambda, rpm, mapSeen)
    cutFor = overrun && rpm > engine.idleRpm + 350 ? cutFor + stepS : 0
    const cut = input.cutsFuel !== false && cutFor > 0.3
    const airTrueMg = fillingMg(engine, engine.trueVe(rpm, mapKpa), mapKpa, iatTrue)
    const ve = valueAt(input.flashed.grid, input.flashed.ve, rpm, mapSeen)
    const multiplier = (1 + warm) * (1 + after) * (1 + accel) * (1 + trim)
    const fuelMg = cut ? 0 : (fillingMg(engine, ve, mapSeen, iatTrue) / engine.stoichAfr / wanted) * multiplier
    const deliveredMg = cut ? 0 : Math.max(0, fuelMg + (input.deadTimeErrorMs ?? 0) * engine.injector.flowMgPerMs)
    const perSecond = rpm / 120
    const burntMg = film(deliveredMg * perSecond) / perSecond
    const phiPort = (burntMg * engine.stoichAfr * level * Math.exp(drift())) / airTrueMg
    const airKgS = airTrueMg * 1e-6 * perSecond * engine.cylinders
    const phiSensor = sensor(exhaust(phiPort, airKgS) / (1 + (input.leakKgS ?? 0) / airKgS))
    const lambda = 1 / Math.max(phiSensor, 0.2) + disturbed.lambdaSd * random.normal()
    const shown = Math.min(engine.sensor.high, Math.max(engine.sensor.low, lambda))
    const silent = isSilent()
    if (input.closedLoop && ect > 60 && !cut && mapKpa < 75 && !silent)
      trim = Math.max(-0.15, Math.min(0.15, trim + 0.25 * (shown - wanted) * stepS))
    else trim *= 1 - stepS / 2
    if (n % every !== 0) return
    write('Time (s)', t, 2)
    write('Engine speed (rpm)', rpm + disturbed.rpmSd * random.normal(), 0)
    write('MAP (kPa)', mapSeen, 1)
    write('Lambda', silent ? 0 : shown, 3)
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
