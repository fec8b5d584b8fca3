/** The log reader against papaparse and Number, and files that are odd or no logs at all. */
import fc from 'fast-check'
import Papa from 'papaparse'
import { describe, expect, test } from 'vitest'
import { createLogReader, type LogReading } from '../../../server/core/csv/read-log.ts'
import { slowNumber } from '../../../server/core/csv/field.ts'

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

  test('numbers with a decimal comma are those of papaparse with the comma as a point', () => {
    const decimal = fc
      .tuple(fc.integer({ min: -99_999, max: 99_999 }), fc.integer({ min: 1, max: 4 }))
      .map(([n, places]) => (n / 10 ** places).toFixed(places).replace('.', ','))
    fc.assert(
      fc.property(
        fc.array(fc.array(decimal, { minLength: 3, maxLength: 3 }), { minLength: 2, maxLength: 30 }),
        fc.constantFrom(';', '\t', '|'),
        fc.integer({ min: 1, max: 90 }),
        (rows, mark, chunk) => {
          const text = ['Zeit', 'Drehzahl', 'b'].join(mark) + '\n' + rows.map((row) => row.join(mark)).join('\n') + '\n'
          const got = columns(text, chunk)
          const oracle = Papa.parse<string[]>(text, { delimiter: mark, skipEmptyLines: true }).data.slice(1)
          expect([...got.columns[1]!]).toEqual(oracle.map((row) => Math.fround(Number(row[1]!.replace(',', '.')))))
          expect(got.faults).toEqual([])
        },
      ),
      { seed: 6, numRuns: 100 },
    )
  })

  test('quoted, padded and plain fields are those of papaparse', () => {
    const dress = fc.constantFrom(
      (text: string) => text,
      (text: string) => `"${text}"`,
      (text: string) => `  ${text} `,
      (text: string) => `+${text}`,
    )
    const field = fc
      .tuple(fc.double({ min: 0, max: 1e6, noNaN: true }), dress)
      .map(([value, wear]) => wear(value < 1e-6 ? '0' : String(value)))
    fc.assert(
      fc.property(fc.array(fc.tuple(field, field, field), { minLength: 1, maxLength: 20 }), (rows) => {
        const text = `Time,a,b\n${rows.map((row) => row.join(',')).join('\n')}\n`
        const oracle = Papa.parse<string[]>(text, { delimiter: ',', skipEmptyLines: true }).data.slice(1)
        const got = columns(text, 11)
        expect([...got.columns[0]!]).toEqual(oracle.map((row) => Number(row[0])))
        expect([...got.columns[2]!]).toEqual(oracle.map((row) => Math.fround(Number(row[2]))))
      }),
      { seed: 7, numRuns: 150 },
    )
  })

  test('a decimal comma that first shows far down is read', () => {
    const got = columns(`Zeit;MAP\n${Array.from({ length: 40 }, (_, i) => `${i};35\n`).join('')}40;35,5\n`)
    expect(got.columns[1]!.at(-1)).toBe(35.5)
  })

  const utf16 = (text: string, low: 0 | 1, mark: boolean) => {
    const units = Array.from((mark ? '\uFEFF' : '') + text, (sign) => sign.charCodeAt(0))
    return Uint8Array.from(units.flatMap((code) => (low === 0 ? [code & 255, code >> 8] : [code >> 8, code & 255])))
  }
  test.each([
    ['little-endian with a mark', 0, true],
    ['big-endian with a mark', 1, true],
    ['little-endian without', 0, false],
    ['big-endian without', 1, false],
  ] as const)('UTF-16 %s is read, in chunks that cut a sign', (_, low, mark) => {
    const got = read(utf16('Time (s);ECT (°C)\r\n0;90,5\r\n1;91\r\n', low, mark), 7)
    expect(got).toMatchObject({ ok: true, header: ['Time', 'ECT'], units: ['s', '°C'], faults: [] })
    expect(got.ok && [...got.columns[1]!]).toEqual([90.5, 91])
  })

  test('Latin-1 and a UTF-8 mark are read', () => {
    const bytes = Uint8Array.from('Time (s),ECT (°C)\n0,90\n1,91\n', (sign) => sign.charCodeAt(0))
    expect(read(bytes)).toMatchObject({ units: ['s', '°C'] })
    expect(columns('\uFEFFTime,RPM\n0,900\n').header).toEqual(['Time', 'RPM'])
  })

  test('a mark behind the last field opens no column', () =>
    expect(columns('Time,RPM\n0,900,\n1,905,\n').faults).toEqual([]))

  test('columns of words and dates are no fault and do not hide the log', () => {
    const got = columns('Date,Time,RPM,Gear,Mode\n2024-05-01,12:00:01.5,900,N,idle\n2024-05-01,12:00:02.5,905,N,idle\n')
    expect([got.rows, got.faults]).toEqual([2, []])
    expect([...got.columns[1]!]).toEqual([43_201.5, 43_202.5])
  })

  test('a date with its time is seconds, as Date.parse counts them', () =>
    expect(slowNumber('2024-05-01T12:00:01.5Z', false)).toBe(Date.parse('2024-05-01T12:00:01.5Z') / 1000))

  test('a first row of which only the time is there is a row', () =>
    expect(columns('Time,RPM,MAP\n0,,\n1,905,36\n').rows).toBe(2))

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

  test('a remark of as many words as there are columns is not the header', () => {
    const got = columns('Logger,Model,Serial\nTime,RPM,MAP\n0,900,35\n1,905,36\n')
    expect([got.header, got.units]).toEqual([
      ['Time', 'RPM', 'MAP'],
      ['', '', ''],
    ])
  })

  test('a quote that is never closed spoils its own field alone, whatever the chunks', () => {
    const body = '0,900,35\n'.repeat(20) + '1,"905,36\n' + '2,910,37\n'.repeat(20)
    for (const chunk of [5, 64, 1000]) {
      const got = columns(`Time,RPM,MAP\n${body}`, chunk)
      expect([got.rows, got.columns[2]![20], got.columns[1]![21]]).toEqual([41, 36, 910])
      expect(got.faults).toEqual([{ kind: 'unreadable field', count: 1, examples: [{ line: 22, text: '"905' }] }])
    }
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
    expect(got.faults).toEqual([
      { kind: 'cut last line', count: 1, examples: [{ line: 4, text: 'the file ends in the middle of a line' }] },
    ])
  })

  test.each([
    ['3150 rpm', 3150],
    ['35°C', 35],
    ['"12.5"', 12.5],
    ['1:02', 62],
    ['1:02:03.5', 3723.5],
    ['1e3', 1000],
    ['  7 ', 7],
    ['1.234,5', 1234.5],
    ['1,234.5', 1234.5],
    ['0x10', NaN],
    ['1e999', NaN],
    ['', NaN],
    ['null', NaN],
  ])('the field %s is %s', (text, value) => expect(slowNumber(text, false)).toBe(value))

  test.each([
    ['', 'empty'],
    ['%PDF-1.4', 'not-text'],
    ['\u0089PNG\r\n', 'not-text'],
    ['<html>', 'not-text'],
    ['BM\u0001\u0002picture', 'not-text'],
    [' \n\n', 'empty'],
    ['Dear all,\nit was 12, not 13, degrees.\n', 'not-a-table'],
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
