/**
 * Detectors against drives of the simulator, which knows nothing of them: on sound drives none speaks; with one fault planted
 * exactly its finding is there. Thresholds of the trade are common practice; the faults' sizes are the test's own.
 */
import { describe, expect, test } from 'vitest'
import { flatbed, targetsOf } from '../../../sample-logs/simulator/demo.ts'
import { trueTable } from '../../../sample-logs/simulator/engine.ts'
import { simulate, type SimulationInput } from '../../../sample-logs/simulator/simulate.ts'
import { findingsOf } from '../../../server/core/findings/index.ts'
import { viewOf } from '../../../server/core/findings/view.ts'
import type { ChannelName, Finding } from '../../../shared/contract/logs.ts'

const titles: Readonly<Record<string, ChannelName>> = {
  'Time (s)': 'time',
  'Engine speed (rpm)': 'rpm',
  'MAP (kPa)': 'map',
  Lambda: 'lambda',
  'Target lambda': 'targetLambda',
  'ECT (°C)': 'ect',
  'IAT (°C)': 'iat',
  'TP (%)': 'tp',
  'Closed loop trim (%)': 'trim',
  'Warm-up (%)': 'warmup',
  'After-start (%)': 'afterStart',
  'Acceleration (%)': 'accel',
  'Pulse width (ms)': 'pulseWidth',
  'Battery (V)': 'battery',
  'BARO (kPa)': 'baro',
}

type Columns = Map<ChannelName, Float64Array>
const get = (columns: Columns, name: ChannelName): Float64Array => columns.get(name)!

/** The flatbed with its table set right. */
const soundEngine = flatbed.engine
const truth = trueTable(soundEngine, flatbed.grid)
const drive = (change: Partial<SimulationInput> = {}): Columns => {
  const log = simulate({
    engine: soundEngine,
    flashed: { grid: flatbed.grid, ve: truth },
    target: { grid: flatbed.grid, lambda: targetsOf(flatbed.grid, (_rpm, kPa) => (kPa >= 88 ? 0.88 : 1)) },
    habit: 'road',
    seconds: 600,
    rateHz: 20,
    seed: 7,
    startC: 82,
    ...change,
  })
  return new Map(Object.entries(log).map(([title, values]) => [titles[title]!, Float64Array.from(values)]))
}

const facts = { lambdaLow: 0.65, lambdaHigh: 1.36, deadTimeMs: 0.92, grid: flatbed.grid, target: null }
const found = (columns: Columns): Finding[] => findingsOf(viewOf(columns, facts)!)
const kinds = (columns: Columns): string[] => found(columns).map(({ kind }) => kind)

/** First row from which `seconds` of rows pass, not before 60 s. */
function place(columns: Columns, seconds: number, test: (row: number) => boolean, last = false): number {
  const rows = seconds * 20
  const n = get(columns, 'time').length
  const fits = (start: number) => Array.from({ length: rows }, (_, k) => start + k).every(test)
  const starts = Array.from({ length: n - rows - 1200 }, (_, k) => 1200 + k).filter(
    (start) => test(start) && test(start + rows - 1) && fits(start),
  )
  const at = last ? starts.at(-1) : starts[0]
  if (at === undefined) throw new Error('the drive has no such place')
  return at
}
const idles = (columns: Columns) => (row: number) =>
  get(columns, 'tp')[row] === 0 && get(columns, 'rpm')[row]! < 950 && get(columns, 'pulseWidth')[row]! > 0
const cruises = (columns: Columns) => (row: number) =>
  get(columns, 'tp')[row]! > 1 && get(columns, 'map')[row]! > 35 && get(columns, 'map')[row]! < 70

describe('a sound drive', () => {
  test.each([
    ['road', 7],
    ['road', 8],
    ['hills', 9],
    ['hills', 10],
    ['yard', 11],
    ['track', 12],
  ] as const)('on the %s with seed %i nothing is found', (habit, seed) =>
    expect(found(drive({ habit, seed }))).toEqual([]),
  )
  test('a cold start of a sound engine is no finding', () => expect(kinds(drive({ startC: 15, seed: 13 }))).toEqual([]))
  test('a closed loop at work is no finding', () => expect(kinds(drive({ closedLoop: true, seed: 14 }))).toEqual([]))
})

const faults: readonly (readonly [string, () => Columns])[] = [
  [
    'stall',
    () => {
      const columns = drive()
      const at = place(columns, 4, idles(columns))
      for (let i = at; i < at + 12; i += 1) get(columns, 'rpm')[i] = 430
      return columns
    },
  ],
  ['hunting', () => drive({ hunting: 220 })],
  [
    'rich-surge',
    () => {
      const columns = drive()
      const at = place(columns, 6, cruises(columns), true)
      for (let i = at + 80; i < at + 110; i += 1) get(columns, 'lambda')[i]! *= 0.74
      return columns
    },
  ],
  ['tip-in', () => drive({ engine: { ...soundEngine, film: { share: 0.5, tauS: 0.9 } }, seed: 8 })],
  [
    'lean-load',
    () => {
      const columns = drive({ habit: 'hills' })
      const { map, lambda } = { map: get(columns, 'map'), lambda: get(columns, 'lambda') }
      for (let i = 0; i < map.length; i += 1) if (map[i]! > 86) lambda[i]! *= 1.12
      return columns
    },
  ],
  [
    'rich-load',
    () => {
      const columns = drive({ habit: 'hills' })
      const { map, lambda } = { map: get(columns, 'map'), lambda: get(columns, 'lambda') }
      for (let i = 0; i < map.length; i += 1) if (map[i]! > 86) lambda[i]! *= 0.84
      return columns
    },
  ],
  ['cut-missing', () => drive({ cutsFuel: false })],
  [
    'cut-stays',
    () => {
      const columns = drive()
      const at = place(columns, 4, idles(columns))
      for (let i = at; i < at + 20; i += 1) {
        get(columns, 'pulseWidth')[i] = 0
        get(columns, 'lambda')[i] = 1.36
      }
      return columns
    },
  ],
  [
    'closed-loop',
    () => {
      const columns = drive({ closedLoop: true })
      const at = place(columns, 6, cruises(columns))
      get(columns, 'trim').fill(15, at, at + 120)
      return columns
    },
  ],
  [
    'dropouts',
    () => {
      const columns = drive()
      for (const at of [2000, 4000, 6000]) get(columns, 'ect').fill(-40, at, at + 4)
      return columns
    },
  ],
  [
    'misfire',
    () => {
      const columns = drive()
      const at = place(columns, 6, cruises(columns), true)
      for (let i = at + 70; i < at + 110; i += 1) {
        get(columns, 'rpm')[i]! += i % 2 === 0 ? 60 : -60
        get(columns, 'lambda')[i]! *= 1.2
      }
      return columns
    },
  ],
  [
    'warm-up',
    () => {
      const columns = drive({ seconds: 900 })
      columns.set(
        'ect',
        get(columns, 'time').map((t) => Math.round(15 + 40 * (1 - Math.exp(-t / 300)))),
      )
      return columns
    },
  ],
  [
    'heat-soak',
    () => {
      const columns = drive({ habit: 'yard' })
      const isIdle = idles(columns)
      let soaked = 0
      columns.set(
        'iat',
        get(columns, 'iat').map((iat, i) => {
          soaked += ((isIdle(i) ? 30 : 0) - soaked) * 0.01
          return Math.round(iat + soaked)
        }),
      )
      return columns
    },
  ],
  ['leak', () => drive({ leakKgS: 6e-4, habit: 'road', seed: 8 })],
  ['dead-time', () => drive({ deadTimeErrorMs: -0.25, habit: 'road', seed: 8 })],
]

describe('one planted fault, exactly its finding', () => {
  test.each(faults)('%s', (kind, make) => {
    const all = found(make())
    expect(all.map((each) => each.kind)).toEqual([kind])
    // Only lean under load says to stop.
    expect(all[0]!.urgency === 'stop').toBe(kind === 'lean-load')
  })

  test('the stretch is where the fault was planted, and its cells are idle cells', () => {
    const columns = faults[0]![1]()
    const [stall] = found(columns)
    const at = get(columns, 'rpm').indexOf(430)
    expect(stall!.stretches[0]!.fromS).toBeCloseTo(get(columns, 'time')[at]!, 2)
    expect(stall!.cells.every((cell) => cell % flatbed.grid.rpm.length <= 1)).toBe(true)
    expect(stall!.numbers[0]).toEqual({ label: 'lowest speed', value: 430, unit: '1/min' })
  })

  test.each([7, 11, 14])('the period of hunting is the simulator’s, 1.9 s, with seed %i', (seed) => {
    const [hunting] = found(drive({ hunting: 140, habit: 'yard', seed }))
    expect(hunting!.kind).toBe('hunting')
    expect(Math.abs(hunting!.numbers[0]!.value - 1.9)).toBeLessThan(0.15)
  })
})

test('a drive of twenty blank rows is no drive to look at', () => {
  const blank = new Float64Array(20).fill(Number.NaN)
  const columns: Columns = new Map([
    ['time', Float64Array.from(blank, (_, i) => i)],
    ['rpm', blank],
    ['map', blank],
  ])
  expect(found(columns)).toEqual([])
  expect(viewOf(new Map(), facts)).toBeNull()
})
