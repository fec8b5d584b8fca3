/** Tables as text: either way round, either decimal mark, faults by row and column, and back again without loss. */
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { canonicalText, tableToCsv, textField } from '../../../server/core/formats/table-csv.ts'
import { readTable } from '../../../server/core/tables/read-table.ts'

const ve = { kind: 've', stoichAfr: 14.7 } as const
const target = { kind: 'target', stoichAfr: 14.7 } as const
const values = (text: string, rules: typeof ve | typeof target = ve) => {
  const read = readTable(text, rules)
  if (!read.ok) throw new Error(read.problems[0]?.detail)
  return read
}

describe('readTable', () => {
  test('a table with speed across and one with speed down are the same table', () => {
    const across = values(',1000,2000,3000\n40,50,55,60\n100,80,85,90')
    const down = values(',40,100\n1000,50,80\n2000,55,85\n3000,60,90')
    expect(down.grid).toEqual(across.grid)
    expect([...down.values]).toEqual([...across.values])
    expect([...across.values]).toEqual([50, 55, 60, 80, 85, 90])
  })

  test('tabs and semicolons take a decimal comma', () => {
    expect([...values('\t1000\t2000\n40\t50,5\t55\n100\t80\t85,25').values]).toEqual([50.5, 55, 80, 85.25])
    expect([...values(';1000;2000\n40;50,5;55\n100;80;85,25').values]).toEqual([50.5, 55, 80, 85.25])
  })

  test('falling axes are turned round', () => {
    const read = values(',2000,1000\n100,85,80\n40,55,50')
    expect(read.grid).toEqual({ rpm: [1000, 2000], mapKpa: [40, 100] })
    expect([...read.values]).toEqual([50, 55, 80, 85])
    expect(read.notes[0]).toMatch(/turned round/)
  })

  test('percentages that look like fractions are remarked upon', () =>
    expect(values(',1000,2000\n40,1.0,1.05\n100,1.1,1.2').notes[0]).toMatch(/if they are fractions/))

  test('air-fuel ratios become lambda of the fuel', () => {
    expect([...values(',1000,2000\n40,14.7,14.7\n100,12.495,12.495', target).values]).toEqual([1, 1, 0.85, 0.85])
  })

  test.each([
    ['a short row', ',1000,2000\n40,50\n100,80,85', /Row|1 values where the axis has 2/, 2, null],
    ['a word', ',1000,2000\n40,50,abc\n100,80,85', /“abc” is not a number/, 2, 3],
    ['a value out of range', ',1000,2000\n40,50,555\n100,80,85', /between 1 and 200; here it is 555/, 2, 3],
    ['an axis that goes up and down', ',1000,3000,2000\n40,50,55,60\n100,80,85,90', /only rise or only fall/, 1, null],
    ['a doubled breakpoint', ',1000,1000\n40,50,55\n100,80,85', /has 1000 twice/, 1, 3],
    ['no speed axis', ',10,20\n40,50,55\n100,80,85', /Cannot tell which axis is engine speed/, null, null],
    ['pressure in another unit', ',1000,2000\n4,50,55\n15,80,85', /Is it in another unit/, null, null],
    ['a number in base sixteen', ',1000,2000\n40,50,0x20\n100,80,85', /“0x20” is not a number/, 2, 3],
    ['too little', '1,2', /at least two breakpoints/, null, null],
  ])('%s is named with its place', (_, text, words, row, col) => {
    const read = readTable(text, ve)
    expect(read.ok).toBe(false)
    const problem = read.ok ? null : read.problems[0]
    expect(problem?.detail).toMatch(words)
    expect([problem?.row, problem?.col]).toEqual([row, col])
  })

  test('no text at all, however odd, throws', () => {
    fc.assert(
      fc.property(fc.string({ maxLength: 300 }), (text) => void readTable(text, ve)),
      { seed: 1, numRuns: 500 },
    )
  })
})

describe('tableToCsv', () => {
  const axis = (least: number, step: number) =>
    fc.array(fc.integer({ min: 1, max: 40 }), { minLength: 2, maxLength: 16 }).map((steps) => {
      let at = least
      return steps.map((each) => (at += each * step))
    })
  const table = fc
    .record({ rpm: axis(1500, 25), mapKpa: axis(30, 2) })
    .filter(({ mapKpa }) => mapKpa.at(-1)! >= 40 && mapKpa.at(-1)! <= 500)
    .chain(({ rpm, mapKpa }) =>
      fc
        .array(fc.double({ min: 1, max: 200, noNaN: true }), {
          minLength: rpm.length * mapKpa.length,
          maxLength: rpm.length * mapKpa.length,
        })
        .map((cells) => ({ grid: { rpm, mapKpa }, cells })),
    )

  test('every export reads back to the same bits, either way round, with either decimal mark', () => {
    fc.assert(
      fc.property(
        table,
        fc.constantFrom('rpm-across' as const, 'rpm-down' as const),
        fc.constantFrom('point' as const, 'comma' as const),
        ({ grid, cells }, axes, decimal) => {
          const read = values(
            tableToCsv({ grid, values: cells, axes, decimal, remarks: ['Draft, not signed', '=1+1'] }),
          )
          expect(read.grid).toEqual(grid)
          expect([...read.values]).toEqual(cells)
        },
      ),
      { seed: 2, numRuns: 200 },
    )
  })

  test('text that a spreadsheet would run as a formula is kept as text (OWASP ASVS 5.0, 1.2.10)', () => {
    expect(textField('=SUM(A1)')).toBe("'=SUM(A1)")
    expect(textField('+49')).toBe("'+49")
    expect(textField('@x')).toBe("'@x")
    expect(textField('a "b", c')).toBe('"a ""b"", c"')
  })

  test('the canonical text changes with any value or breakpoint', () => {
    const grid = { rpm: [1000, 2000], mapKpa: [40, 100] }
    const base = canonicalText(grid, [1, 2, 3, 4])
    expect(base).toBe('rpm 1000 2000\nkPa 40 100\n1 2\n3 4\n')
    expect(canonicalText(grid, [1, 2, 3, 4.0000001])).not.toBe(base)
  })
})
