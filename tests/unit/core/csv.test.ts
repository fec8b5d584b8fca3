/** The log reader against papaparse and Number, and files that are odd or no logs at all. */
import fc from 'fast-check'
import Papa from 'papaparse'
import { describe, expect, test } from 'vitest'
import { createLogReader, type LogReading } from '../../../server/core/csv/read-log.ts'
import { slowNumber } from '../../../server/core/csv/scan.ts'

function read(text: string | Uint8Array, chunk = 7): LogReading {
  const bytes = typeof text === 'string' ? new TextEncoder().encode(text) : text
  const reader = createLogReader()
  for (let at = 0; at < bytes.length; at += chunk) {
    const refusal = reader.push(bytes.subarray(at, at + chunk))
    if (refusal) return refusal
  }
  return reader.end()
}
const columns = (text: string, chunk?: number) => {
  const got = read(text, chunk)
  if (!got.ok) throw new Error(got.detail)
  return got
}

describe('reading', () => {
  test('numbers are bit for bit those of papaparse, Number and single precision, in chunks of any size', () => {
    const decimal = fc
      .tuple(fc.integer({ min: -999_999, max: 999_999 }), fc.integer({ min: 0, max: 6 }))
      .map(([n, places]) => (n / 10 ** places).toFixed(places))
    const row = fc.array(decimal, { minLength: 4, maxLength: 4 })
    fc.assert(
      fc.property(
        fc.array(row, { minLength: 2, maxLength: 40 }),
        fc.constantFrom(',', ';', '\t'),
        fc.constantFrom('\n', '\r\n'),
        fc.integer({ min: 1, max: 90 }),
        (rows, mark, end, chunk) => {
          const text = ['a', 'b', 'c', 'd'].join(mark) + end + rows.map((each) => each.join(mark)).join(end) + end
          const got = columns(text, chunk)
          const oracle = Papa.parse<string[]>(text, { delimiter: mark, skipEmptyLines: true }).data.slice(1)
          expect(got.rows).toBe(rows.length)
          got.columns.forEach((column, i) =>
            expect([...column]).toEqual(oracle.map((fields) => Math.fround(Number(fields[i])))),
          )
        },
      ),
      { seed: 3, numRuns: 150 },
    )
  })

  test('time keeps all its digits', () => {
    expect([...columns('Time (s),RPM\n1234567.125,900\n1234567.175,905\n').columns[0]!]).toEqual([
      1234567.125, 1234567.175,
    ])
  })

  test('units come from the header or from a row of their own', () => {
    expect(columns('Time (s),MAP [kPa]\n0,40\n1,41\n').units).toEqual(['s', 'kPa'])
    const rowed = columns('Time,MAP\ns,kPa\n0,40\n1,41\n')
    expect([rowed.header, rowed.units, rowed.rows]).toEqual([['Time', 'MAP'], ['s', 'kPa'], 2])
  })

  test('lines of metadata before the header are passed over', () => {
    const got = columns('Logger 3000\nfirmware;1.2\n\nTime;RPM;MAP\n0;900;35\n1;905;36\n')
    expect([got.header, got.rows]).toEqual([['Time', 'RPM', 'MAP'], 2])
  })

  test('blank, "-", "n/a" and NaN say nothing and are no fault; words are a fault with their line', () => {
    const got = columns('Time,RPM\n0,900\n1,-\n2,n/a\n3,\n4,NaN\n5,oops\n6,910\n')
    expect([...got.columns[1]!]).toEqual([900, NaN, NaN, NaN, NaN, NaN, 910])
    expect(got.faults).toEqual([{ kind: 'unreadable field', count: 1, examples: [{ line: 7, text: 'oops' }] }])
  })

  test('ragged rows are counted and their missing fields say nothing', () => {
    const got = columns('Time,RPM,MAP\n0,900,35\n1,905\n2,910,36,7\n3,915,37\n')
    expect([...got.columns[2]!]).toEqual([35, NaN, 36, 37])
    expect(got.faults[0]).toMatchObject({ kind: 'ragged row', count: 2 })
  })

  test('a last line that was cut off is left out and said', () => {
    const got = columns('Time,RPM,MAP\n0,900,35\n1,905,36\n2,91')
    expect(got.rows).toBe(2)
    expect(got.faults.some(({ kind }) => kind === 'cut last line')).toBe(true)
  })

  test.each([
    ['3150 rpm', 3150],
    ['35°C', 35],
    ['"12.5"', 12.5],
    ['1:02', 62],
    ['1:02:03.5', 3723.5],
    ['1e3', 1000],
    ['  7 ', 7],
    ['', NaN],
    ['null', NaN],
  ])('the field %s is %s', (text, value) => expect(slowNumber(text, false)).toBe(value))

  test.each([
    ['', 'empty'],
    ['%PDF-1.4', 'not-text'],
    ['\u0089PNG\r\n', 'not-text'],
    ['<html>', 'not-text'],
    ['a,b\n', 'not-a-table'],
    ['x\u0000y', 'not-text'],
  ])('%j is refused as %s', (text, reason) => {
    expect(read(Uint8Array.from(text, (sign) => sign.charCodeAt(0)))).toMatchObject({ ok: false, reason })
  })

  test('no bytes at all, however odd, throw', () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 400 }), (bytes) => void read(bytes, 50)),
      { seed: 4, numRuns: 400 },
    )
    fc.assert(
      fc.property(
        fc.array(fc.constantFrom('1', ',', '\n', '"', ';', 'a', '.', '-', '\r', '\t'), { maxLength: 200 }),
        (signs) => void read(signs.join(''), 3),
      ),
      { seed: 5, numRuns: 600 },
    )
  })
})
