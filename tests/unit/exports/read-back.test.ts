/** Which revision a read-back is: to the places it was read with, and no further. */
import { expect, test } from 'vitest'
import { compareReadBack } from '../../../server/features/exports/read-back.ts'

const grid = { rpm: [1000, 2000], mapKpa: [50, 100] }
const table = (number: number, values: number[], state: 'draft' | 'signed' = 'signed') => ({
  id: `id-${number}`,
  number,
  state,
  checksum: '',
  grid,
  values: Float64Array.from(values),
})
const read = (values: number[], halfPlace: number, axes = grid) => ({
  grid: axes,
  values: Float64Array.from(values),
  halfPlace,
})

test('a value rounded to the places read back matches; one place further off differs, by rpm, kPa and value', () => {
  const tables = [table(2, [50.04, 60, 70, 80])]
  expect(compareReadBack(tables, read([50, 60, 70, 80], 0.05), null).matches?.number).toBe(2)
  const answer = compareReadBack(tables, read([50.1, 60, 70.2, 80], 0.05), null)
  expect(answer.matches).toBeNull()
  expect(answer.closest?.differ).toEqual([
    { cell: 0, rpm: 1000, mapKpa: 50, expected: 50.04, found: 50.1 },
    { cell: 2, rpm: 1000, mapKpa: 100, expected: 70, found: 70.2 },
  ])
})

test('of revisions it cannot tell apart, the nearest is named and the others are not hidden', () => {
  const tables = [table(3, [50.2, 60, 70, 80], 'draft'), table(2, [50.01, 60, 70, 80])]
  const answer = compareReadBack(tables, read([50, 60, 70, 80], 0.5), 'id-3')
  expect(answer.matches).toMatchObject({ number: 2, state: 'signed', inEngine: false })
  expect(answer.alsoMatches).toMatchObject([{ number: 3, state: 'draft', inEngine: true }])
})

test('an axis that went through psi still matches; a moved breakpoint is named', () => {
  const tables = [table(1, [50, 60, 70, 80])]
  const through = { rpm: [1000, 2000], mapKpa: [50.001, 100] }
  expect(compareReadBack(tables, read([50, 60, 70, 80], 0, through), null).matches?.number).toBe(1)
  const moved = { rpm: [1000, 2100], mapKpa: [50, 100] }
  expect(compareReadBack(tables, read([50, 60, 70, 80], 0, moved), null)).toMatchObject({
    matches: null,
    closest: null,
    axes: [{ axis: 'rpm', expected: 2000, found: 2100 }],
  })
})

test('a table of another size matches nothing', () => {
  const small = { rpm: [1000, 2000, 3000], mapKpa: [50, 100] }
  const answer = compareReadBack([table(1, [1, 2, 3, 4])], read([1, 2, 3, 4, 5, 6], 0, small), null)
  expect(answer.detail).toMatch(/table of this size/)
})
