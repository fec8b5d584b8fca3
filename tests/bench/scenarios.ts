/** What the learner is measured on: three invented engines, rich and lean start tables, several rates and drivers. */
import { flatbed, handMade, targetsOf, turboFour, type DemoVehicle } from '../../sample-logs/simulator/demo.ts'
import type { Habit } from '../../sample-logs/simulator/driver.ts'
import { breathing, type SimulatedEngine } from '../../sample-logs/simulator/engine.ts'
import { simulate, type Disturbances, type SimulationInput } from '../../sample-logs/simulator/simulate.ts'
import type { Drive, EngineFacts } from '../../server/core/drive.ts'
import type { Grid } from '../../shared/grid.ts'
import { driveOf } from '../support/drives.ts'

export interface Plant {
  readonly name: string
  readonly engine: SimulatedEngine
  readonly facts: EngineFacts
  readonly grid: Grid
  readonly target: Float64Array
  readonly start: Float64Array
}

export interface Scenario {
  readonly name: string
  readonly plant: Plant
  readonly habit: Habit
  readonly seconds: number
  readonly rateHz: number
  readonly seed: number
  readonly startC: number
  readonly closedLoop?: boolean
  readonly disturbances?: Partial<Disturbances>
}

const factsOf = (engine: SimulatedEngine, boosted: boolean): EngineFacts => ({
  displacementL: engine.displacementL,
  cylinders: engine.cylinders,
  boosted,
  lambdaRange: { low: engine.sensor.low, high: engine.sensor.high },
  revLimitRpm: engine.revLimitRpm,
  stoichAfr: engine.stoichAfr,
  injector: { mgPerMs: engine.injector.flowMgPerMs, deadTimeMs: engine.injector.deadTimeMs },
})

const eightEngine: SimulatedEngine = {
  displacementL: 4.95,
  cylinders: 8,
  idleRpm: 750,
  revLimitRpm: 5400,
  ambientKpa: 100.6,
  topKpa: 99,
  trueVe: breathing({ peak: 84, peakRpm: 3300, width: 1900, ripplePct: 1.4, topKpa: 103 }),
  film: { share: 0.28, tauS: 0.7 },
  transport: { t0S: 0.1, massKg: 1.6e-3 },
  sensor: { lagS: 0.1, low: 0.65, high: 1.4 },
  injector: { flowMgPerMs: 3.1, deadTimeMs: 1 },
  stoichAfr: 14.4,
}
const eightGrid: Grid = {
  rpm: [600, 900, 1200, 1600, 2000, 2500, 3000, 3500, 4000, 4600, 5200],
  mapKpa: [24, 32, 40, 48, 56, 64, 72, 80, 90, 100],
}
const coarseGrid: Grid = {
  rpm: [600, 1100, 1600, 2200, 2900, 3600, 4400, 5400],
  mapKpa: [25, 36, 47, 58, 69, 80, 91, 102],
}

/** The present table of the demo, further off: people come with worse. */
const spoilt = (vehicle: DemoVehicle, off: (rpm: number, mapKpa: number) => number): Plant => ({
  name: vehicle.name,
  engine: vehicle.engine,
  facts: factsOf(vehicle.engine, vehicle.sheet.boosted),
  grid: vehicle.grid,
  target: vehicle.target,
  start: handMade(vehicle.engine, vehicle.grid, 5, off),
})
const richSix = spoilt(flatbed, (rpm, mapKpa) => (mapKpa > 80 ? 14 : rpm < 1300 ? 26 : 19))
const richTurbo = spoilt(turboFour, (rpm, mapKpa) => (mapKpa > 100 ? 20 : rpm < 2000 ? 10 : 16))
const leanEight: Plant = {
  name: 'Lean eight',
  engine: eightEngine,
  facts: factsOf(eightEngine, false),
  grid: eightGrid,
  target: targetsOf(eightGrid, (_rpm, mapKpa) => (mapKpa >= 85 ? 0.87 : mapKpa >= 70 ? 0.93 : 0.99)),
  start: handMade(eightEngine, eightGrid, 6, (rpm, mapKpa) => (mapKpa < 45 ? -16 : rpm > 3000 ? -9 : -12)),
}
const coarseEight: Plant = {
  ...leanEight,
  name: 'Coarse eight',
  grid: coarseGrid,
  target: targetsOf(coarseGrid, (_rpm, mapKpa) => (mapKpa >= 85 ? 0.87 : mapKpa >= 70 ? 0.93 : 0.99)),
  start: handMade(eightEngine, coarseGrid, 7, (_rpm, mapKpa) => (mapKpa < 45 ? 22 : 15)),
}

export const plants = { richSix, richTurbo, leanEight, coarseEight }

const twenty = { seconds: 1200, rateHz: 20, startC: 72 }
export const scenarios: readonly Scenario[] = [
  { ...twenty, name: 'six, rich, road', plant: richSix, habit: 'road', seed: 101 },
  { ...twenty, name: 'six, rich, hills', plant: richSix, habit: 'hills', seed: 102 },
  { ...twenty, name: 'six, rich, cold start', plant: richSix, habit: 'hills', seed: 103, startC: 18 },
  { ...twenty, name: 'turbo, rich, hills', plant: richTurbo, habit: 'hills', seed: 104 },
  { ...twenty, name: 'turbo, rich, track', plant: richTurbo, habit: 'track', seed: 105 },
  {
    ...twenty,
    name: 'turbo, demo table, road',
    plant: { ...richTurbo, start: turboFour.flashed },
    habit: 'road',
    seed: 106,
  },
  { ...twenty, name: 'eight, lean, 10 Hz', plant: leanEight, habit: 'hills', rateHz: 10, seed: 107 },
  { ...twenty, name: 'eight, lean, track', plant: leanEight, habit: 'track', rateHz: 10, seed: 108 },
  { ...twenty, name: 'eight, 8 x 8 table', plant: coarseEight, habit: 'hills', seed: 109 },
  {
    ...twenty,
    name: 'six, closed loop, 50 Hz',
    plant: richSix,
    habit: 'hills',
    rateHz: 50,
    seed: 110,
    closedLoop: true,
  },
  {
    ...twenty,
    name: 'six, gusty wind',
    plant: richSix,
    habit: 'hills',
    seed: 111,
    disturbances: { drift: { sd: 0.01, tauS: 20 } },
  },
  {
    ...twenty,
    name: 'turbo, sensor drops out',
    plant: richTurbo,
    habit: 'hills',
    seed: 112,
    disturbances: { dropoutsPerMin: 3 },
  },
]

/** Drives the scenario. @param ve  the table in the controller, by default the one it starts with. */
export function driveScenario(
  scenario: Scenario,
  ve: Float64Array = scenario.plant.start,
  extra: Partial<SimulationInput> = {},
): Drive {
  const { plant } = scenario
  const log = simulate({
    engine: plant.engine,
    flashed: { grid: plant.grid, ve },
    target: { grid: plant.grid, lambda: plant.target },
    habit: scenario.habit,
    seconds: scenario.seconds,
    rateHz: scenario.rateHz,
    seed: scenario.seed,
    startC: scenario.startC,
    ...(scenario.closedLoop ? { closedLoop: true } : {}),
    ...(scenario.disturbances ? { disturbances: scenario.disturbances } : {}),
    ...extra,
  })
  return driveOf(log, `${scenario.name} ${scenario.seed}`, { grid: plant.grid, ve, target: plant.target })
}
