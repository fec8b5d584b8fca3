/** Blocks of samples: lossless to the bit whatever they hold, and decimals in planes. */
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { minMaxLevel } from '../../../server/features/logs/columns.ts'
import { decodeBlock, encodeBlock } from '../../../server/platform/columns/block-codec.ts'

const bits = (values: Float32Array | Float64Array) => [...new Uint8Array(values.slice().buffer)]

describe('the block codec', () => {
  test('any floats come back to the bit, NaN for NaN', () => {
    fc.assert(
      fc.property(fc.float32Array({ maxLength: 200 }), (values) => {
        const back = decodeBlock(encodeBlock(values))
        expect([...back].map((value) => (Number.isNaN(value) ? 'NaN' : Object.is(value, -0) ? '-0' : value))).toEqual(
          [...values].map((value) => (Number.isNaN(value) ? 'NaN' : Object.is(value, -0) ? '-0' : value)),
        )
      }),
      { seed: 7, numRuns: 400 },
    )
  })

  test('decimals with gaps come back to the bit and take the planes', () => {
    const reading = fc.oneof(
      fc
        .tuple(fc.integer({ min: -99_999, max: 99_999 }), fc.integer({ min: 0, max: 3 }))
        .map(([n, places]) => Math.fround(n / 10 ** places)),
      fc.constant(Number.NaN),
    )
    fc.assert(
      fc.property(fc.array(reading, { minLength: 1, maxLength: 300 }), (list) => {
        const values = Float32Array.from(list)
        const bytes = encodeBlock(values)
        const back = decodeBlock(bytes)
        expect([...back]).toEqual([...values])
      }),
      { seed: 8, numRuns: 400 },
    )
    expect(encodeBlock(Float32Array.from([1.5, 2.5, Number.NaN]))[0]).toBe(1)
    expect(encodeBlock(Float32Array.from([Math.fround(Math.PI)]))[0]).toBe(2)
    expect(Object.is(decodeBlock(encodeBlock(Float32Array.from([-0, 1])))[0], -0)).toBe(true)
  })

  test('doubles, which time is, come back to the bit', () => {
    fc.assert(
      fc.property(fc.float64Array({ maxLength: 100, noNaN: true }), (values) => {
        expect(bits(decodeBlock(encodeBlock(values)))).toEqual(bits(values))
      }),
      { seed: 9, numRuns: 200 },
    )
  })

  test('bytes nobody wrote are refused', () =>
    expect(() => decodeBlock(Uint8Array.from([9, 0, 0, 0, 0, 0]))).toThrow(RangeError))

  test('the level holds the lowest and highest of every 64 samples', () => {
    const level = minMaxLevel(Float32Array.from({ length: 70 }, (_, i) => (i < 64 ? i : Number.NaN)))
    expect([...level]).toEqual([0, 63, Number.NaN, Number.NaN])
  })
})
