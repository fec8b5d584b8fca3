/** Spreadsheet cells in and out, and arithmetic on a selection. */
import fc from 'fast-check'
import Papa from 'papaparse'
import { describe, expect, test } from 'vitest'
import { add, blendTowardsNeighbours, interpolate, scale } from '../../../src/ui/heatmap/arithmetic.ts'
import { blockText, placePaste, readNumber } from '../../../src/ui/heatmap/clipboard.ts'
import { cellsOf, columnOf, everything, rowOf } from '../../../src/ui/heatmap/selection.ts'
import { fitEdit } from '../../../src/ui/heatmap/table-editor.tsx'

const grid = { rpm: [800, 1500, 3000, 5500], mapKpa: [30, 55, 100] }
const values = [40, 41, 42, 43, 50, 51, 52, 53, 60, 61, 62, 63]
const limits = { min: 1, max: 200, digits: 1, quantity: 'VE, %' }

describe('copying', () => {
  test('rows go from the highest load down, as they stand on the page; papaparse reads the same cells', () => {
    const text = blockText(grid, values, { anchor: 1, focus: 6 }, 'point', 1)
    expect(Papa.parse<string[]>(text, { delimiter: '\t' }).data).toEqual([
      ['51', '52'],
      ['41', '42'],
    ])
  })

  test('with a decimal comma no point is left', () => {
    expect(blockText(grid, [61.55, null], { anchor: 0, focus: 1 }, 'comma', 2)).toBe('61,55\t')
  })

  test('what is copied comes back to the same values, with either mark and from any selection', () => {
    const tenths = fc.integer({ min: 10, max: 2000 }).map((value) => value / 10)
    fc.assert(
      fc.property(
        fc.array(tenths, { minLength: 12, maxLength: 12 }),
        fc.integer({ min: 0, max: 11 }),
        fc.integer({ min: 0, max: 11 }),
        fc.constantFrom('point' as const, 'comma' as const),
        (table, anchor, focus, mark) => {
          const text = blockText(grid, table, { anchor, focus }, mark, 1)
          const cells = cellsOf(grid, { anchor, focus })
          const placed = placePaste(grid, { anchor, focus }, text)
          if (!placed.ok) throw new Error(placed.problem)
          expect(placed.cells.toSorted((a, b) => a.cell - b.cell)).toEqual(
            cells.map((cell) => ({ cell, value: table[cell] })),
          )
        },
      ),
    )
  })
})

describe('pasting', () => {
  test('one number goes into every selected cell', () => {
    const placed = placePaste(grid, { anchor: 4, focus: 9 }, '61,5\r\n')
    expect(placed).toMatchObject({ ok: true, cells: [8, 9, 4, 5].map((cell) => ({ cell, value: 61.5 })) })
  })

  test('semicolons part cells where there is no tab, and an empty field leaves its cell alone', () => {
    const placed = placePaste(grid, { anchor: 8, focus: 8 }, '70;;72\n60;61;')
    expect(placed.ok && placed.cells).toEqual([
      { cell: 8, value: 70 },
      { cell: 10, value: 72 },
      { cell: 4, value: 60 },
      { cell: 5, value: 61 },
    ])
  })

  test('a word is refused with its place, and a block that sticks out is refused whole', () => {
    const words = placePaste(grid, { anchor: 8, focus: 8 }, '70\t71\n60\tlean')
    expect(words).toEqual({
      ok: false,
      problem: 'Row 2, column 2 of what was pasted: “lean” is not a number. Nothing was changed.',
    })
    expect(placePaste(grid, { anchor: 3, focus: 3 }, '1\t2').ok).toBe(false)
    expect(placePaste(grid, { anchor: 0, focus: 0 }, '1\n2').ok).toBe(false)
    expect(placePaste(grid, { anchor: 0, focus: 0 }, ' \n').ok).toBe(false)
  })

  test('numbers: either mark and a true minus are read; two marks, letters and formulas are not guessed at', () => {
    expect(['61.5', '61,5', ' 61 ', '\u22122,5', '3 %', '.5'].map(readNumber)).toEqual([61.5, 61.5, 61, -2.5, 3, 0.5])
    expect(['1,234.5', '1.234,5', '=A1', '0x10', '1e3', '', '.', 'Infinity'].map(readNumber)).toEqual(
      Array(8).fill(null),
    )
  })
})

const plane = (a: number, b: number, c: number) =>
  grid.mapKpa.flatMap((mapKpa) => grid.rpm.map((rpm) => a + b * rpm + c * mapKpa))
const anyPlane = fc.tuple(
  fc.integer({ min: 1, max: 80 }),
  fc.integer({ min: -9, max: 9 }).map((n) => n / 1000),
  fc.integer({ min: -9, max: 9 }).map((n) => n / 100),
)

describe('arithmetic on a selection', () => {
  test('scaling by 10 % and adding', () => {
    expect(scale([0, 4], values, 10).map(({ value }) => value.toFixed(9))).toEqual(['44.000000000', '55.000000000'])
    expect(add([0, 4], values, -1.5)).toEqual([
      { cell: 0, value: 38.5 },
      { cell: 4, value: 48.5 },
    ])
    expect(scale([0], [null], 10)).toEqual([])
  })

  test('interpolating goes by rpm and kPa, not by the count of cells: a plane is found again from its ends', () => {
    fc.assert(
      fc.property(anyPlane, fc.constantFrom('rpm' as const, 'load' as const, 'both' as const), ([a, b, c], along) => {
        const truth = plane(a, b, c)
        const corners = new Set([0, 3, 8, 11])
        const keep = (cell: number) =>
          along === 'rpm'
            ? cell % 4 === 0 || cell % 4 === 3
            : along === 'load'
              ? cell < 4 || cell > 7
              : corners.has(cell)
        const broken = truth.map((value, cell) => (keep(cell) ? value : 1))
        for (const { cell, value } of interpolate(grid, everything(grid), broken, along))
          expect(value).toBeCloseTo(truth[cell]!, 9)
      }),
    )
  })

  test('blending leaves a plane alone and takes half of a single bump at 50 %', () => {
    fc.assert(
      fc.property(anyPlane, ([a, b, c]) => {
        const truth = plane(a, b, c)
        for (const { cell, value } of blendTowardsNeighbours(grid, cellsOf(grid, everything(grid)), truth, 70))
          expect(value).toBeCloseTo(truth[cell]!, 9)
      }),
    )
    const bump = plane(50, 0, 0).map((value, cell) => (cell === 5 ? 60 : value))
    expect(blendTowardsNeighbours(grid, [5], bump, 50)).toEqual([{ cell: 5, value: 55 }])
    // A corner has no neighbours on opposite sides.
    expect(blendTowardsNeighbours(grid, [0], bump, 50)).toEqual([])
  })

  test('an edit is rounded, leaves pinned cells, and is refused whole when a value is out of bounds', () => {
    const cells = [
      { cell: 0, value: 50.26 },
      { cell: 1, value: 51 },
    ]
    expect(fitEdit(cells, limits, (cell) => cell === 1)).toEqual({
      cells: [{ cell: 0, value: 50.3 }],
      words: '1 cell set. 1 pinned cell stays.',
    })
    const wild = fitEdit([...cells, { cell: 2, value: 400 }], limits, () => false)
    expect(wild.cells).toEqual([])
    expect(wild.words).toContain('400.0 is outside 1 to 200')
    expect(fitEdit([{ cell: 0, value: Number.NaN }], limits, () => false).cells).toEqual([])
  })
})

test('a row, a column and the whole table are selections', () => {
  expect(cellsOf(grid, rowOf(grid, 1))).toEqual([4, 5, 6, 7])
  expect(cellsOf(grid, columnOf(grid, 2))).toEqual([2, 6, 10])
  expect(cellsOf(grid, everything(grid))).toHaveLength(12)
})
