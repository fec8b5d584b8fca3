/** Whoever writes to console.error or console.warn in a test fails it: such words are faults nobody reads. */
import { afterEach, beforeEach, expect, vi } from 'vitest'

const said: string[] = []
const note = (...words: unknown[]): void => {
  said.push(words.map(String).join(' '))
}

beforeEach(() => {
  said.length = 0
  vi.spyOn(console, 'error').mockImplementation(note)
  vi.spyOn(console, 'warn').mockImplementation(note)
})

afterEach(() => {
  expect(said, 'console.error or console.warn was called').toEqual([])
})
