/** What leaves as text comes back: the same bits, or the same text at the precision it states. */
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { kpaPer } from '../../../server/core/formats/map-unit.ts'
import { tableToCsv, textField, type TableExport } from '../../../server/core/formats/table-csv.ts'
import { readTable } from '../../../server/core/tables/read-table.ts'

const stoichAfr = 14.08

function read(text: string, kind: 've' | 'target' = 've') {
  const reading = readTable(text, { kind, stoichAfr })
  if (!reading.ok) throw new Error(reading.problems.map(({ detail }) => detail).join(' '))
  return reading
}

/** Breakpoints to 0.001 kPa, as finely as any table is written. */
const axis = (least: number, step: number) =>
  fc.array(fc.integer({ min: 1, max: 40_000 }), { minLength: 2, maxLength: 12 }).map((steps) => {
    let at = least * 1000
    return steps.map((each) => Math.round((at += each * step)) / 1000)
  })
const table = (low: number, high: number) =>
  fc
    .record({ rpm: axis(1500, 20), mapKpa: axis(20, 1) })
    .filter(({ mapKpa }) => mapKpa.at(-1)! >= 40 && mapKpa.at(-1)! <= 500)
    .chain(({ rpm, mapKpa }) => {
      const cells = rpm.length * mapKpa.length
      return fc
        .array(fc.double({ min: low, max: high, noNaN: true }), { minLength: cells, maxLength: cells })
        .map((values) => ({ grid: { rpm, mapKpa }, values }))
    })
const form = fc.record({
  axes: fc.constantFrom('rpm-across' as const, 'rpm-down' as const),
  decimal: fc.constantFrom('point' as const, 'comma' as const),
  mapUnit: fc.constantFrom('kPa' as const, 'bar' as const, 'psi' as const),
  tabs: fc.boolean(),
})
const remarks = ['DRAFT, NOT SIGNED: a vehicle, fuel table', '=1+1']

describe('round trips', () => {
  test('at every place: axes in any unit and values come back to the same bits', () => {
    fc.assert(
      fc.property(table(2, 200), form, ({ grid, values }, options) => {
        const back = read(tableToCsv({ grid, values, remarks, ...options }))
        expect(back.grid).toEqual(grid)
        expect([...back.values]).toEqual(values)
      }),
      { seed: 11, numRuns: 300 },
    )
  })

  test('at a stated number of places: values come back rounded to it and nothing else', () => {
    fc.assert(
      fc.property(table(2, 199), form, fc.integer({ min: 0, max: 6 }), ({ grid, values }, options, places) => {
        const back = read(tableToCsv({ grid, values, remarks, places, ...options }))
        expect([...back.values]).toEqual(values.map((value) => Number(value.toFixed(places))))
        expect(back.halfPlace).toBe(0.5 * 10 ** -places)
      }),
      { seed: 12, numRuns: 300 },
    )
  })

  test('a target as AFR: written, read and written again it is the same text, and lambda is nearer than half a place', () => {
    fc.assert(
      fc.property(table(0.6, 1.5), form, fc.integer({ min: 1, max: 4 }), ({ grid, values }, options, places) => {
        const as: TableExport = { grid, values, remarks: [], places, stoichAfr, ...options }
        const text = tableToCsv(as)
        const back = read(text, 'target')
        expect(tableToCsv({ ...as, grid: back.grid, values: back.values })).toBe(text)
        back.values.forEach((value, i) => {
          expect(Math.abs(value - values[i]!)).toBeLessThanOrEqual(back.halfPlace * (1 + 1e-9))
        })
      }),
      { seed: 13, numRuns: 300 },
    )
  })

  test('an exported revision in JSON comes back to the same bits, whatever else is in the file', () => {
    fc.assert(
      fc.property(table(2, 200), ({ grid, values }) => {
        const back = read(JSON.stringify({ vehicle: 'x', kind: 've', grid, values, note: '{' }, null, 2))
        expect(back.grid).toEqual(grid)
        expect([...back.values]).toEqual(values)
      }),
      { seed: 14, numRuns: 100 },
    )
  })
})

describe('units of the MAP axis', () => {
  test('1 psi is 6.894757 kPa and 1 bar is 100 kPa (NIST SP 811, appendix B.8)', () => {
    expect(kpaPer.psi).toBeCloseTo(6.894757, 6)
    expect(kpaPer.bar).toBe(100)
  })

  test('the corner names the unit, and reading says which it was', () => {
    const text = tableToCsv({
      grid: { rpm: [1000, 2000], mapKpa: [50, 100] },
      values: [1, 2, 3, 4],
      axes: 'rpm-across',
      decimal: 'point',
      mapUnit: 'psi',
      remarks: [],
    })
    expect(text).toBe('psi \\ rpm,1000,2000\r\n7.25189,1,2\r\n14.50377,3,4\r\n')
    expect(read(text).notes.join()).toMatch(/psi absolute/)
  })
})

describe('what is no table', () => {
  test.each([
    ['{"kind":"ve"}', /no exported revision/],
    ['{ not json', /no exported revision/],
    ['{"kind":"target","grid":{"rpm":[1,2],"mapKpa":[1,2]},"values":[1,1,1,1]}', /holds a target table/],
    ['{"kind":"ve","grid":{"rpm":[2,1],"mapKpa":[1,2]},"values":[1,1,1,1]}', /do not rise/],
    ['{"kind":"ve","grid":{"rpm":[1000,2000],"mapKpa":[50,100]},"values":[50,50,50]}', /3 values/],
    ['{"kind":"ve","grid":{"rpm":[1000,2000],"mapKpa":[50,100]},"values":[50,50,50,900]}', /between 1 and 200/],
    ['{"kind":"ve","grid":{"rpm":[1000,2000],"mapKpa":[5,10]},"values":[50,50,50,50]}', /another unit/],
  ])('%s is refused in words', (text, words) => {
    const reading = readTable(text, { kind: 've', stoichAfr })
    expect(!reading.ok && reading.problems[0]?.detail).toMatch(words)
  })

  test('a remark cannot leave its line or become a formula', () => {
    expect(textField('a\r\n=1+1\tb')).toBe('a =1+1 b')
    expect(textField('  =1+1')).toBe("'  =1+1")
  })
})
