/** Pure parts of the pages: tones and their contrast, numbers as written, decisions and rules, sums of the sheet. */
import { readFileSync } from 'node:fs'
import { describe, expect, test } from 'vitest'
import {
  applyChanges,
  cellsByRule,
  cellState,
  inverseOf,
  tally,
  type Decided,
} from '../../../src/features/proposals/decisions.ts'
import { sumsOf } from '../../../src/features/vehicles/sums.ts'
import { formatClock, formatNumber, formatSigned } from '../../../src/lib/format.ts'
import { cellAfter, cellsOf } from '../../../src/ui/heatmap/selection.ts'
import { toneOf } from '../../../src/ui/heatmap/scale.ts'

/** Relative luminance and contrast of WCAG 2.2. */
const luminance = (hex: string): number => {
  const [r, g, b] = [1, 3, 5].map((at) => {
    const c = parseInt(hex.slice(at, at + 2), 16) / 255
    return c <= 0.03928 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4
  }) as [number, number, number]
  return 0.2126 * r + 0.7152 * g + 0.0722 * b
}
const contrast = (a: string, b: string): number => {
  const [high, low] = [luminance(a), luminance(b)].sort((x, y) => y - x) as [number, number]
  return (high + 0.05) / (low + 0.05)
}

describe('contrast', () => {
  test('the formula gives the vectors of WCAG 2.2 technique G18: 21, 4.54 and 4.48', () => {
    expect(contrast('#000000', '#ffffff')).toBeCloseTo(21, 2)
    expect(contrast('#767676', '#ffffff')).toBeCloseTo(4.542, 3)
    expect(contrast('#777777', '#ffffff')).toBeCloseTo(4.478, 3)
  })

  const css = readFileSync('src/tokens.css', 'utf8')
  const [light, dark] =
    css.split('[data-theme="dark"]').length > 1 ? css.split('[data-theme="dark"]') : css.split("[data-theme='dark']")
  const token = (block: string, name: string) => new RegExp(`--color-${name}:\\s*(#[0-9a-f]{6})`).exec(block)?.[1] ?? ''
  for (const [theme, block] of [
    ['light', light],
    ['dark', dark],
  ] as const) {
    test(`text on all 22 tones of the ${theme} theme has at least 4.5 to 1`, () => {
      for (const family of ['seq', 'div']) {
        for (let n = 0; n <= 10; n += 1) {
          expect(
            contrast(token(block!, `${family}-${n}`), token(block!, `on-${family}-${n}`)),
            `${family}-${n}`,
          ).toBeGreaterThanOrEqual(4.5)
        }
      }
    })

    test(`words on every ground of the ${theme} theme have at least 4.5 to 1`, () => {
      for (const ground of ['ground', 'sheet', 'sunk']) {
        for (const ink of ['ink', 'ink-quiet', 'ink-faint', 'copper', 'slate']) {
          expect(contrast(token(block!, ground), token(block!, ink)), `${ink} on ${ground}`).toBeGreaterThanOrEqual(4.5)
        }
      }
    })
  }
})

describe('tones', () => {
  test.each([
    ['magnitude', 35, 0],
    ['magnitude', 42, 1],
    ['magnitude', 96, 10],
    ['change', 0, 5],
    ['change', 0.9, 5],
    ['change', -20, 0],
    ['change', 4, 7],
    ['change', 16, 10],
    ['evidence', 0.5, 0],
    ['evidence', 100, 10],
    ['uncertainty', 0.4, 0],
    ['uncertainty', 7, 10],
  ] as const)('%s of %s is tone %s', (view, value, tone) => expect(toneOf(view, value)).toBe(tone))

  test('no value has no tone', () => expect(toneOf('change', null)).toBeNull())
})

describe('numbers', () => {
  test.each([
    [37440, 0, '37\u202f440'],
    [5600, 0, '5600'],
    [-10.94, 1, '\u221210.9'],
    [-0.01, 1, '0.0'],
    [NaN, 1, 'none'],
  ])('%s with %s places', (value, places, text) => expect(formatNumber(value, places)).toBe(text))
  test('signs', () =>
    expect([formatSigned(1.2, 1), formatSigned(-1.2, 1), formatSigned(0.01, 1)]).toEqual(['+1.2', '\u22121.2', '0.0']))
  test('clock', () => expect(formatClock(754)).toBe('12:34'))
})

describe('the grid', () => {
  const grid = { rpm: [1, 2, 3], mapKpa: [1, 2] }
  test('arrows move and stop at the edges; Home and End go to the ends of the row', () => {
    expect([
      cellAfter(grid, 0, 'ArrowUp', false),
      cellAfter(grid, 3, 'ArrowUp', false),
      cellAfter(grid, 0, 'ArrowLeft', false),
    ]).toEqual([3, 3, 0])
    expect([
      cellAfter(grid, 4, 'Home', false),
      cellAfter(grid, 3, 'End', false),
      cellAfter(grid, 0, 'x', false),
    ]).toEqual([3, 5, null])
  })
  test('a range is the rectangle between its ends, whichever was first', () => {
    expect(cellsOf(grid, { anchor: 5, focus: 1 })).toEqual([1, 2, 4, 5])
  })
})

const decided: Decided = {
  surface: {
    grid: { rpm: [1000, 2000], mapKpa: [40, 100] },
    current: [50, 60, 70, 80],
    proposed: [45, 61, 70, 88],
    fitted: [45, 61, 68, 88],
    evidenceS: [10, 3, 2, 0],
    sigmaPct: [1, 2, 3, 9],
    misfitPct: [0, 0, 0, null],
    handNearest: [null, null, null, null],
    handBilinear: [null, null, null, null],
    held: [{ cell: 2, reason: 'held', releaseS: 5 }],
    visits: [4, 2, 1, 0],
    byPulse: [null, null, null, null],
    diagnoses: [],
    logs: [],
    path: { t0S: 0.08, massKg: 0.001, lagS: 0.09, filmShare: 0.15, filmTauS: 0.5 },
    delay: { idleS: 0.3, cruiseS: 0.2, fullS: 0.15 },
  },
  decisions: ['open', 'open', 'open', 'kept'],
  byHand: [null, null, null, null],
}

describe('decisions', () => {
  test('a rule takes open cells with enough evidence and a change beyond its doubt, never a held one', () => {
    const rule = { action: 'accepted', mostPct: Infinity, direction: 'either', among: null } as const
    expect(cellsByRule(decided, { ...rule, evidenceS: 5, sigmas: 2 })).toEqual([0])
    expect(cellsByRule(decided, { ...rule, evidenceS: 0, sigmas: 0 })).toEqual([0, 1])
  })

  test('accepting, setting by hand and undoing add up', () => {
    const changes = [
      { cell: 0, decision: 'accepted' as const },
      { cell: 3, decision: 'by-hand' as const, value: 77 },
    ]
    const after = applyChanges(decided, changes)
    expect(tally(after)).toMatchObject({ accepted: 1, byHand: 1, held: 1, open: 1, none: 0, changed: 2 })
    expect(tally(after).largestPct).toBeCloseTo(-10, 10)
    expect(applyChanges(after, inverseOf(decided, changes))).toEqual(decided)
    expect(cellState(decided, 3)).toBe('none')
  })
})

describe('sums of the engine sheet', () => {
  test('base pulse width closes with first principles: 85 % of 60 kPa at 25 °C gives 6.574 ms', () => {
    // 2.0 L four, 250 cc/min, 745 kg/m3, AFR 14.6: derived from the ideal gas law, R 287.0475; ours is at 100 kPa and 20 °C, VE 100 %.
    const sums = sumsOf({
      displacementL: 2,
      cylinders: 4,
      boosted: false,
      revLimitRpm: 6000,
      injectorFlowCcMin: 250,
      injectorPressureKpa: 300,
      deadTimeMs: 1,
      fuel: 'custom',
      stoichAfr: 14.6,
      fuelDensityGPerCc: 0.745,
      lambdaLow: 0.65,
      lambdaHigh: 1.36,
    })
    const base = sums.find(({ name }) => name === 'Base pulse width')!.value
    expect((base * 0.85 * 0.6 * 293.15) / 298.15).toBeCloseTo(6.574364, 3)
  })
})
