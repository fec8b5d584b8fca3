/** Which cells a reviewer is shown first, and the change in figures. */
import { expect, test } from 'vitest'
import type { Revision } from '../../../shared/contract/tables.ts'
import { changeSummary, lookFirst } from '../../../server/features/reviews/look-first.ts'

const grid = { rpm: [1000, 2000, 3000], mapKpa: [30, 60, 100] }
const before = [50, 50, 50, 60, 60, 60, 80, 80, 80]

const revision = (after: number[], extra: Partial<Revision> = {}): Revision => ({
  id: 'r',
  vehicleId: 'v',
  kind: 've',
  number: 2,
  parentId: 'p',
  state: 'draft',
  author: { id: 'a', name: 'A' },
  createdAt: '2026-01-01T00:00:00.000Z',
  note: '',
  origin: 'proposal',
  logs: [],
  cellsChanged: 0,
  checksum: '',
  signature: null,
  flashed: false,
  grid,
  values: after,
  parentValues: before,
  proposalId: null,
  settings: null,
  coreVersion: null,
  provenance: {
    decision: after.map(() => 'accepted' as const),
    evidenceS: after.map(() => 20),
    sigmaPct: after.map(() => 1),
  },
  ...extra,
})
const change = (cells: Record<number, number>) => before.map((value, cell) => cells[cell] ?? value)

test('a small step to lean at high load stands before a large one to rich at light load', () => {
  const [first, second] = lookFirst(revision(change({ 0: 56, 7: 79 })))
  expect(first).toMatchObject({ cell: 7, why: 'Leaner at high load', note: 'lean mixture under load melts pistons' })
  expect(second).toMatchObject({ cell: 0, why: 'The largest change, richer' })
})

test('thin evidence at high load is said', () => {
  const thin = revision(change({ 7: 79 }))
  const evidenceS = before.map(() => 4.9)
  expect(lookFirst({ ...thin, provenance: { ...thin.provenance!, evidenceS } })[0]?.note).toBe('on thin evidence')
})

test('the least certain are those with the widest uncertainty, not the first met', () => {
  const all = revision(change({ 0: 50.1, 1: 50.1, 2: 50.1, 3: 60.1 }))
  const sigmaPct = [5, 9, 4.5, 8, 1, 1, 1, 1, 1]
  const look = lookFirst({ ...all, provenance: { ...all.provenance!, sigmaPct } })
  expect(look.filter(({ why }) => why === 'The least certain').map(({ cell }) => cell)).toEqual([1, 3])
})

test('a step that was as steep before is not this revision’s doing', () => {
  const whys = (after: number[]) => lookFirst(revision(after)).map(({ why }) => why)
  expect(whys(change({ 3: 60.3, 4: 60.3, 5: 60.3 }))).not.toContain('Steep against its neighbour')
  expect(whys(before.map((value) => value * 1.1))).not.toContain('Steep against its neighbour')
  expect(whys(change({ 3: 69, 4: 70 }))).toContain('Steep against its neighbour')
})

test('the figures count cells by what they do to the mixture', () => {
  const veSummary = changeSummary(revision(change({ 0: 55, 6: 76, 7: 84 })))
  expect(veSummary).toMatchObject({ changed: 3, leaner: 1, richer: 2, highLoad: 2, highLoadLeaner: 1, thin: 0 })
  expect(veSummary!.largestPct).toBeCloseTo(10, 9)
  const lambda = changeSummary(revision(change({ 6: 81 }), { kind: 'target' }))
  expect(lambda).toMatchObject({ leaner: 1, highLoadLeaner: 1 })
  expect(changeSummary(revision(before, { parentValues: null }))).toBeNull()
})
