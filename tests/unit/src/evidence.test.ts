/** What the cell card says: who spoke, how old it is, what the guard did; and the runs of a replay. */
import { describe, expect, test } from 'vitest'
import type { Proposal, Replay } from '../../../shared/contract/proposals.ts'
import { guard } from '../../../server/core/fit/guard.ts'
import type { Surface } from '../../../src/features/proposals/decisions.ts'
import {
  agesOf,
  guardSentence,
  leanerThanGuard,
  logParts,
  stretchesOf,
} from '../../../src/features/proposals/evidence.ts'
import { runsOf } from '../../../src/features/proposals/replay-points.ts'

const grid = { rpm: [1000, 3000], mapKpa: [40, 100] }
const input = {
  grid,
  current: Float64Array.of(50, 60, 80, 80),
  fitted: Float64Array.of(49, 90, 79.5, 70),
  sigma: Float64Array.of(0.01, 0.01, 0.02, 0.02),
  evidenceS: Float64Array.of(10, 20, 2, 30),
  hasEvidence: Uint8Array.of(1, 1, 1, 1),
  stepCapPct: 20,
}
const { proposed, held } = guard(input)
const logs = [
  { id: 'a', number: 2, title: '', used: true, drivenOn: '2026-03-01' },
  { id: 'b', number: 5, title: '', used: true, drivenOn: '2026-03-09' },
] satisfies Proposal['logs']
const surface = {
  grid,
  current: [...input.current],
  fitted: [...input.fitted],
  proposed: [...proposed],
  evidenceS: [...input.evidenceS],
  held,
  logs: [
    { logId: 'a', evidenceS: [8, 20, 0, 30] },
    { logId: 'b', evidenceS: [2, 0, 0.2, 0] },
  ],
} as unknown as Surface

describe('the cell card', () => {
  test('logs are named with their seconds and share, the one with most first', () => {
    expect(logParts(surface, logs, 0).map(({ log, seconds, share }) => [log.number, seconds, share])).toEqual([
      [2, 8, 0.8],
      [5, 2, 0.2],
    ])
    expect(logParts(surface, logs, 1)).toHaveLength(1)
  })

  test('age counts from the newest drive that spoke; a tenth of a second is no visit', () => {
    expect(agesOf(surface, logs, new Date('2026-03-11T12:00:00Z'))).toEqual([2, 10, null, 10])
  })

  test('what the guard did is said as the learner’s guard did it', () => {
    expect(guardSentence(surface, 0, 20)).toBe('The lean guard and the step limit changed nothing here.')
    expect(guardSentence(surface, 1, 20)).toMatch(
      /^The fit says 90.0; one revision moves a cell by 20 % at most, so 72.0/,
    )
    expect(guardSentence(surface, 2, 20)).toMatch(/Leaner at high load on 2.0 s.*About \d+ s more would release it/)
    expect(guardSentence(surface, 3, 20)).toBe(
      `The fit says 70.0. At high load only the rich side of its doubt is taken: ${proposed[3]!.toFixed(1)}.`,
    )
  })

  test('a value by hand below the guard’s at high load is spoken of, elsewhere not', () => {
    expect(leanerThanGuard(surface, 3, 70)).toBe(true)
    expect(leanerThanGuard(surface, 3, 72)).toBe(false)
    expect(leanerThanGuard(surface, 0, 30)).toBe(false)
  })

  test('readings with a gap, or of another log, are another stretch', () => {
    const sample = (logId: string, timeS: number, ve: number, share: number) => ({
      logId,
      timeS,
      rpm: 1000,
      mapKpa: 40,
      lambda: 1,
      ve,
      share,
    })
    const found = stretchesOf([
      sample('a', 10, 50, 1),
      sample('a', 12, 56, 0.5),
      sample('a', 40, 51, 1),
      sample('b', 41, 52, 1),
    ])
    expect(found.map(({ logId, fromS, toS, samples }) => [logId, fromS, toS, samples])).toEqual([
      ['a', 10, 12, 2],
      ['a', 40, 40, 1],
      ['b', 41, 41, 1],
    ])
    expect(found[0]!.ve).toBeCloseTo(52, 12)
  })
})

test('a replayed line stops where a value is missing and has a 95 % band', () => {
  const replay = {
    timeS: [0, 1, 2, 3, 4],
    predicted: [1, 1.02, null, 0.9, 0.91],
    measured: [1, null, 1, null, 1],
    bandPct: [1, 1, 1, 2, 2],
  } as unknown as Replay
  expect(runsOf(replay, 'predicted').map((run) => run.map(({ t }) => t))).toEqual([
    [0, 1],
    [3, 4],
  ])
  expect(runsOf(replay, 'measured')).toEqual([])
  expect(runsOf(replay, 'predicted')[1]![0]!.high).toBeCloseTo(0.9 * (1 + 1.96 * 0.02), 12)
})
