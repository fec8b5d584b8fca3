/** The two vehicles of the demo workshop and the drives they made; invented throughout, their truth known. */
import type { Grid } from '../../shared/grid.ts'
import type { EngineSheetInput } from '../../shared/contract/vehicles.ts'
import type { Habit } from './driver.ts'
import { breathing, trueTable, type SimulatedEngine } from './engine.ts'
import { seeded } from './random.ts'
import { simulate, type SimulatedLog } from './simulate.ts'

export interface DemoDrive {
  readonly title: string
  readonly note: string
  readonly recordedOn: string
  readonly habit: Habit
  readonly seconds: number
  readonly seed: number
  readonly startC: number
  readonly hunting?: number
  readonly dead?: 'iat'
}

export interface DemoVehicle {
  readonly name: string
  readonly description: string
  readonly sheet: EngineSheetInput
  readonly engine: SimulatedEngine
  readonly grid: Grid
  /** The table it came with, %. */
  readonly flashed: Float64Array
  readonly target: Float64Array
  readonly drives: readonly DemoDrive[]
}

/** A table set by hand: the truth, off by a factor that grows and shrinks in plateaus, in whole and half numbers. */
export function handMade(
  engine: SimulatedEngine,
  grid: Grid,
  seed: number,
  offPct: (rpm: number, mapKpa: number) => number,
): Float64Array {
  const random = seeded(seed)
  return trueTable(engine, grid).map((ve, i) => {
    const rpm = grid.rpm[i % grid.rpm.length]!
    const mapKpa = grid.mapKpa[Math.floor(i / grid.rpm.length)]!
    const off = offPct(rpm, mapKpa) + 2.2 * random.normal()
    return Math.round(2 * ve * (1 + off / 100)) / 2
  })
}

export const targetsOf = (grid: Grid, at: (rpm: number, mapKpa: number) => number): Float64Array =>
  Float64Array.from({ length: grid.rpm.length * grid.mapKpa.length }, (_, i) =>
    at(grid.rpm[i % grid.rpm.length]!, grid.mapKpa[Math.floor(i / grid.rpm.length)]!),
  )

const flatbedEngine: SimulatedEngine = {
  displacementL: 2.983,
  cylinders: 6,
  idleRpm: 800,
  revLimitRpm: 5600,
  ambientKpa: 101.2,
  topKpa: 100,
  trueVe: breathing({ peak: 88, peakRpm: 3000, width: 2100, ripplePct: 1.2, topKpa: 103 }),
  film: { share: 0.22, tauS: 0.55 },
  transport: { t0S: 0.09, massKg: 1.1e-3 },
  sensor: { lagS: 0.08, low: 0.65, high: 1.36 },
  injector: { flowMgPerMs: 2.67, deadTimeMs: 0.92 },
  stoichAfr: 14.1,
}
const flatbedGrid: Grid = {
  rpm: [600, 800, 1100, 1500, 2000, 2500, 3000, 3500, 4000, 4500, 5000, 5600],
  mapKpa: [25, 32, 39, 46, 53, 60, 67, 74, 81, 88, 96, 103],
}

const turboEngine: SimulatedEngine = {
  displacementL: 1.998,
  cylinders: 4,
  idleRpm: 900,
  revLimitRpm: 6800,
  ambientKpa: 101.2,
  topKpa: 180,
  trueVe: breathing({ peak: 93, peakRpm: 4200, width: 2600, ripplePct: 0.9, topKpa: 200 }),
  film: { share: 0.15, tauS: 0.4 },
  transport: { t0S: 0.07, massKg: 0.8e-3 },
  sensor: { lagS: 0.07, low: 0.65, high: 1.36 },
  injector: { flowMgPerMs: 5.4, deadTimeMs: 0.85 },
  stoichAfr: 14.3,
}
const turboGrid: Grid = {
  rpm: [700, 900, 1300, 1800, 2400, 3000, 3600, 4200, 4800, 5400, 6000, 6800],
  mapKpa: [28, 38, 50, 62, 75, 88, 100, 115, 130, 150, 175, 200],
}

export const flatbed: DemoVehicle = {
  name: 'Nursery flatbed',
  description:
    '1984, 3.0-litre straight six. Drinks fuel, hunts at idle, stalls when it rolls to a stop with the trailer on.',
  sheet: {
    displacementL: 2.983,
    cylinders: 6,
    boosted: false,
    revLimitRpm: 5600,
    injectorFlowCcMin: 214,
    injectorPressureKpa: 300,
    deadTimeMs: 0.92,
    fuel: 'e10',
    stoichAfr: 14.1,
    fuelDensityGPerCc: 0.749,
    lambdaLow: 0.65,
    lambdaHigh: 1.36,
  },
  engine: flatbedEngine,
  grid: flatbedGrid,
  flashed: handMade(
    flatbedEngine,
    flatbedGrid,
    84,
    (rpm, mapKpa) => (mapKpa > 85 ? 4 : rpm < 1300 ? 15 : 9) - (rpm > 2800 && mapKpa > 90 ? 7 : 0),
  ),
  target: targetsOf(flatbedGrid, (rpm, mapKpa) => (mapKpa >= 88 ? 0.88 : mapKpa >= 74 ? 0.94 : rpm < 1000 ? 0.97 : 1)),
  drives: [
    {
      title: 'Cold start and idle in the yard',
      note: '',
      recordedOn: '2026-10-09',
      habit: 'yard',
      seconds: 420,
      seed: 11,
      startC: 14,
      hunting: 140,
    },
    {
      title: 'Dry, level road',
      note: '',
      recordedOn: '2026-10-09',
      habit: 'road',
      seconds: 900,
      seed: 12,
      startC: 66,
      hunting: 120,
    },
    {
      title: 'Dry, two long hills',
      note: '',
      recordedOn: '2026-10-11',
      habit: 'hills',
      seconds: 1080,
      seed: 13,
      startC: 70,
      hunting: 120,
    },
    {
      title: 'Wet road, trailer on',
      note: 'It stalled rolling up to the packing shed again.',
      recordedOn: '2026-10-14',
      habit: 'road',
      seconds: 900,
      seed: 14,
      startC: 40,
      hunting: 140,
      dead: 'iat',
    },
  ],
}

export const turboFour: DemoVehicle = {
  name: 'Turbo four',
  description: '1991, 2.0-litre turbocharged four. Fine at cruise, unknown under boost.',
  sheet: {
    displacementL: 1.998,
    cylinders: 4,
    boosted: true,
    revLimitRpm: 6800,
    injectorFlowCcMin: 435,
    injectorPressureKpa: 300,
    deadTimeMs: 0.85,
    fuel: 'e5',
    stoichAfr: 14.3,
    fuelDensityGPerCc: 0.747,
    lambdaLow: 0.65,
    lambdaHigh: 1.36,
  },
  engine: turboEngine,
  grid: turboGrid,
  flashed: handMade(turboEngine, turboGrid, 91, (_rpm, mapKpa) => (mapKpa > 100 ? 12 : 1)),
  target: targetsOf(turboGrid, (_rpm, mapKpa) =>
    mapKpa >= 130 ? 0.8 : mapKpa >= 100 ? 0.85 : mapKpa >= 75 ? 0.93 : 1,
  ),
  drives: [
    {
      title: 'Evening run, no boost',
      note: '',
      recordedOn: '2026-10-12',
      habit: 'road',
      seconds: 780,
      seed: 21,
      startC: 62,
    },
  ],
}

export const demoVehicles: readonly DemoVehicle[] = [flatbed, turboFour]

/** Drives one of the demo drives again; the same bits every time. */
export const driveAgain = (
  vehicle: DemoVehicle,
  demo: DemoDrive,
  ve: ArrayLike<number> = vehicle.flashed,
): SimulatedLog =>
  simulate({
    engine: vehicle.engine,
    flashed: { grid: vehicle.grid, ve },
    target: { grid: vehicle.grid, lambda: vehicle.target },
    habit: demo.habit,
    seconds: demo.seconds,
    rateHz: 20,
    seed: demo.seed,
    startC: demo.startC,
    ...(demo.hunting === undefined ? {} : { hunting: demo.hunting }),
    ...(demo.dead === undefined ? {} : { dead: demo.dead }),
  })
