/** Whom a comment speaks to. */
import { expect, test } from 'vitest'
import { mentionsIn } from '../../../server/features/reviews/comments.ts'

const people = ['Ann', 'Ann Lee', 'Bo'].map((name) => ({ id: name, name }))
const names = (text: string) => mentionsIn(text, people).map(({ name }) => name)

test('a name counts only after "@"', () => {
  expect(names('Ann, look')).toEqual([])
  expect(names('@Bo look')).toEqual(['Bo'])
})

test('where one name begins with another, the longer counts, and both when both are written', () => {
  expect(names('@Ann Lee look')).toEqual(['Ann Lee'])
  expect(names('@Ann Lee and @Ann')).toEqual(['Ann Lee', 'Ann'])
})

test('a pattern in a name is no pattern', () => {
  expect(
    mentionsIn('@a.b', [
      { id: '1', name: 'a+b' },
      { id: '2', name: '.*' },
    ]),
  ).toEqual([])
})
