/** The sentences the pages of read-back and carry-over open with. */
import { expect, test } from 'vitest'
import type { ReadBack } from '../../../shared/contract/exports.ts'
import type { Moved } from '../../../shared/contract/proposals.ts'
import { readBackSentence } from '../../../src/features/exports/read-back-page.tsx'
import { movedSentence } from '../../../src/features/proposals/carry-over-page.tsx'

const nothing: ReadBack = { matches: null, alsoMatches: [], closest: null, axes: [], within: 0, detail: '' }
const revision = { id: 'r', number: 2, state: 'signed' as const, inEngine: true }
const cell = { cell: 0, rpm: 1000, mapKpa: 40, expected: 50, found: 51 }

test('a read-back says which revision it is, and that nobody has signed it', () => {
  expect(readBackSentence({ ...nothing, matches: revision })).toBe('It is revision 2, cell for cell')
  expect(readBackSentence({ ...nothing, matches: { ...revision, state: 'draft' } })).toBe(
    'It is revision 2, cell for cell, which nobody has signed',
  )
  expect(readBackSentence({ ...nothing, closest: { ...revision, differ: [cell] } })).toBe(
    '1 cell differs from revision 2',
  )
  expect(readBackSentence({ ...nothing, axes: [{ axis: 'rpm', expected: 1000, found: 1100 }] })).toMatch(/axes are not/)
  expect(readBackSentence(nothing)).toBe('It matches no revision of this vehicle')
})

const still: Moved = {
  version: 1,
  base: { id: 'b', number: 1 },
  onto: null,
  sameAxes: true,
  contested: [],
  theirsOnly: [],
  mineOnly: [],
}
const moved = { cell: 0, rpm: 1000, mapKpa: 40, base: 50, theirs: 51, mine: 52 }
const onto = { id: 'o', number: 3, author: 'A', state: 'draft' }

test('an overtaken proposal says how many cells moved and how many were decided otherwise', () => {
  expect(movedSentence(still)).toMatch(/^Nothing has moved/)
  expect(movedSentence({ ...still, onto, sameAxes: false })).toMatch(/other axes/)
  expect(movedSentence({ ...still, onto, theirsOnly: [moved] })).toBe(
    'Revision 3 has moved 1 cell, none that you decided',
  )
  expect(movedSentence({ ...still, onto, theirsOnly: [moved], contested: [moved] })).toBe(
    'Revision 3 has moved 2 cells; you decided 1 of them otherwise',
  )
})
