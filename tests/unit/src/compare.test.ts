/** Any two revisions against each other. */
import { expect, test } from 'vitest'
import type { Revision } from '../../../shared/contract/tables.ts'
import { compareSentence, differenceOf } from '../../../src/features/reviews/compare.ts'

const make = (number: number, mapKpa: number[], values: number[], kind: 've' | 'target' = 've') =>
  ({ number, kind, grid: { rpm: [1000, 2000], mapKpa }, values }) as Revision

test('of the same axes, cells that differ are named with both values, the largest step first', () => {
  const from = make(1, [40, 100], [50, 60, 70, 80])
  const to = make(3, [40, 100], [50, 57, 70, 88])
  const difference = differenceOf(from, to)
  expect(difference.interpolated).toBe(false)
  expect(difference.differ).toEqual([
    expect.objectContaining({ cell: 3, rpm: 2000, mapKpa: 100, before: 80, after: 88 }),
    expect.objectContaining({ cell: 1, rpm: 2000, mapKpa: 40, before: 60, after: 57 }),
  ])
  expect(compareSentence(from, to, difference)).toBe('Revision 3 differs from 1 in 2 of 4 cells: 1 richer, 1 leaner')
})

test('of other axes, the first is read between its breakpoints; a plane does not differ from itself', () => {
  const from = make(1, [40, 100], [50, 60, 80, 90])
  const same = make(2, [40, 70, 100], [50, 60, 65, 75, 80, 90])
  expect(differenceOf(from, same)).toMatchObject({ interpolated: true, differ: [] })
})

test('more lambda is leaner', () => {
  const from = make(1, [40, 100], [1, 1, 0.9, 0.9], 'target')
  const to = make(2, [40, 100], [1, 1, 0.9, 0.95], 'target')
  expect(compareSentence(from, to, differenceOf(from, to))).toMatch(/0 richer, 1 leaner/)
})
