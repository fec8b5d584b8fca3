/** The stretch of a drive that is shown, and what the cursor reads. */
import { describe, expect, test } from 'vitest'
import { stretchAfter, withinDrive } from '../../../src/features/logs/stretch-bar.tsx'
import { valueAtCursor } from '../../../src/features/logs/traces.tsx'

describe('the stretch shown', () => {
  test.each([
    ['+', { from: 45, to: 55 }],
    ['-', { from: 30, to: 70 }],
    ['[', { from: 30, to: 50 }],
    [']', { from: 50, to: 70 }],
    ['0', { from: 0, to: 100 }],
    ['x', null],
  ])('key %s from 40 to 60 leads to %j', (key, after) =>
    expect(stretchAfter(key, { from: 40, to: 60 }, 100)).toEqual(after),
  )
  test.each([
    [
      { from: -10, to: 10 },
      { from: 0, to: 20 },
    ],
    [
      { from: 95, to: 115 },
      { from: 80, to: 100 },
    ],
    [
      { from: -50, to: 150 },
      { from: 0, to: 100 },
    ],
    [
      { from: 50, to: 50.1 },
      { from: 50, to: 52 },
    ],
  ])('%j is pushed back to %j', (asked, shown) => expect(withinDrive(asked, 100)).toEqual(shown))
})

describe('the value at the cursor', () => {
  const trace = { channel: 'map' as const, unit: 'kPa', timeS: [0, 1, 2], low: [30, 40, null], high: [30, 45, null] }
  test.each([
    [0.4, '30 kPa'],
    [1, '40 to 45 kPa'],
    [9, 'no reading'],
  ])('at %d s: %s', (second, words) => expect(valueAtCursor(trace, second)).toBe(words))
})
