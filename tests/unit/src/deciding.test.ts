/** Rules, what the decisions come to, and what is kept on the device. */
import { describe, expect, test } from 'vitest'
import {
  cellsByRule,
  decideAll,
  holds,
  type Decided,
  type Rule,
  type Surface,
} from '../../../src/features/proposals/decisions.ts'
import { dutyPct, highestDuty } from '../../../src/features/proposals/duty.ts'
import { profileOf } from '../../../src/features/proposals/profile-points.ts'
import { regionChanges, regionOf } from '../../../src/features/proposals/regions.ts'

const surface = {
  grid: { rpm: [800, 3000], mapKpa: [40, 60, 100] },
  current: [50, 60, 55, 66, 70, 80],
  proposed: [45, 63, 55, 60, 70, 80],
  fitted: [45, 63, 55, 60, 65, 80],
  evidenceS: [30, 10, 1, 20, 4, 0],
  sigmaPct: [1, 2, 3, 2, 4, 9],
  held: [{ cell: 4, reason: 'held', releaseS: 5 }],
} as unknown as Surface
const decided: Decided = {
  surface,
  decisions: ['open', 'open', 'accepted', 'pinned', 'open', 'kept'],
  byHand: [null, null, null, 64, null, null],
}
const every: Rule = { action: 'accepted', evidenceS: 0, sigmas: 0, mostPct: Infinity, direction: 'either', among: null }

describe('rules', () => {
  test('what a rule can do decides which cells it looks at', () => {
    expect(cellsByRule(decided, every)).toEqual([0, 1])
    expect(cellsByRule(decided, { ...every, action: 'kept' })).toEqual([0, 1, 4])
    expect(cellsByRule(decided, { ...every, action: 'pinned' })).toEqual([0, 1, 4, 5])
    expect(cellsByRule(decided, { ...every, action: 'open' })).toEqual([2, 3])
  })

  test('direction, largest change and the selection narrow it', () => {
    expect(cellsByRule(decided, { ...every, direction: 'richer' })).toEqual([1])
    expect(cellsByRule(decided, { ...every, direction: 'leaner' })).toEqual([0])
    expect(cellsByRule(decided, { ...every, mostPct: 6 })).toEqual([1])
    expect(cellsByRule(decided, { ...every, among: new Set([0, 5]) })).toEqual([0])
  })

  test('accepting leaves out cells without evidence; pinning holds a value set by hand', () => {
    expect(decideAll(decided, [0, 5], 'accepted')).toEqual([{ cell: 0, decision: 'accepted' }])
    expect(decideAll(decided, [0, 3], 'pinned')).toEqual([
      { cell: 0, decision: 'pinned' },
      { cell: 3, decision: 'pinned', value: 64 },
    ])
  })

  test('whether the server already holds a step is seen from its decisions and values', () => {
    expect(holds(decided, [{ cell: 3, decision: 'pinned', value: 64 }])).toBe(true)
    expect(holds(decided, [{ cell: 3, decision: 'pinned' }])).toBe(false)
    expect(holds(decided, [{ cell: 0, decision: 'accepted' }])).toBe(false)
  })
})

describe('what it comes to', () => {
  test('idle, cruise and load part the table; a mean weighs each cell by its seconds', () => {
    expect([0, 1, 2, 3, 4, 5].map((cell) => regionOf(surface.grid, cell))).toEqual([
      'idle',
      'cruise',
      'idle',
      'cruise',
      'load',
      'load',
    ])
    const [idle, cruise, load] = regionChanges({ ...decided, decisions: decided.decisions.with(0, 'accepted') })
    expect(idle).toEqual({ region: 'idle', cells: 2, meanPct: expect.closeTo((30 * -10 + 0) / 31, 9) as number })
    expect(cruise!.meanPct).toBeCloseTo((20 * (64 / 66 - 1) * 100) / 30, 9)
    expect(load).toMatchObject({ cells: 1, meanPct: 0 })
  })

  const sheet = {
    displacementL: 4,
    cylinders: 4,
    boosted: false,
    revLimitRpm: 6000,
    injectorFlowCcMin: 600,
    injectorPressureKpa: 300,
    deadTimeMs: 1,
    fuel: 'custom',
    stoichAfr: 14.7,
    fuelDensityGPerCc: 0.75,
    lambdaLow: 0.7,
    lambdaHigh: 1.3,
  } as const

  test('duty: a litre of air at 20 °C and 101.325 kPa weighs 1.2041 g (handbook density of dry air)', () => {
    const fuelMs = 1204.1 / 14.7 / 0.9 / ((600 * 0.75) / 60)
    expect(dutyPct(sheet, 6000, 101.325, 100, 0.9)).toBeCloseTo((100 * (fuelMs + 1)) / 20, 2)
  })

  test('the highest duty is looked for up to the rev limit', () => {
    const grid = { rpm: [3000, 6000, 7000], mapKpa: [50, 100] }
    expect(
      highestDuty(
        sheet,
        grid,
        () => 80,
        () => 0.9,
      )?.cell,
    ).toBe(4)
    expect(
      highestDuty(
        sheet,
        grid,
        () => Number.NaN,
        () => 0.9,
      ),
    ).toBeNull()
  })

  test('a cut runs along its axis and has a band only where a log has been', () => {
    const cut = profileOf(decided, 1, 'load')
    expect(cut.map(({ cell, at, after }) => [cell, at, after])).toEqual([
      [1, 40, 63],
      [3, 60, 64],
      [5, 100, 80],
    ])
    expect(cut[0]!.high - cut[0]!.low).toBeCloseTo(2 * 1.96 * 0.02 * 63, 9)
    expect(cut[2]!.high - cut[2]!.low).toBe(0)
  })
})
