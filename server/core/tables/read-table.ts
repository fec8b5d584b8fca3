/** A table as text, from a file or a spreadsheet: axes in the first row and column, either way round. */
import Papa from 'papaparse'
import type { TableFault } from '../../../shared/contract/tables.ts'
import type { Grid } from '../../../shared/grid.ts'
import { mapUnitOf, readMap } from '../formats/map-unit.ts'
import { readRevisionJson } from './read-revision-json.ts'

export type TableReading =
  | {
      readonly ok: true
      readonly grid: Grid
      readonly values: Float64Array
      readonly notes: readonly string[]
      /** Half of the last decimal place that was written, in table units: nearer than this the text cannot tell. */
      readonly halfPlace: number
    }
  | { readonly ok: false; readonly problems: readonly TableFault[] }

export interface TableRules {
  readonly kind: 've' | 'target'
  /** Set when values above 5 are air-fuel ratios of this fuel. */
  readonly stoichAfr: number
}

const maxBreakpoints = 64
const fault = (detail: string, row: number | null = null, col: number | null = null, text = ''): TableFault => ({
  row,
  col,
  text,
  detail,
})

/** A number with a decimal point or comma; NaN where it is none. */
function readCell(text: string, comma: boolean): number {
  const trimmed = text
    .trim()
    .replace(/\s*(%|kpa|rpm)$/i, '')
    .replace('\u2212', '-')
  return /^[+-]?0[xob]/i.test(trimmed) || trimmed === ''
    ? Number.NaN
    : Number(comma ? trimmed.replace(',', '.') : trimmed)
}

/** Rows of the text that belong to the table: lines after "#" and blank lines are remarks. */
function rowsOf(text: string): { rows: string[][]; lines: number[]; comma: boolean } {
  const kept = text
    .replace(/^\uFEFF/, '')
    .split(/\r\n|\n|\r/)
    .map((line, i) => ({ line, number: i + 1 }))
    .filter(({ line }) => line.replace(/[,;\t"]/g, '').trim() !== '' && !/^\s*"?#/.test(line))
  const all = kept.map(({ line }) => line).join('\n')
  const delimiter = all.includes('\t') ? '\t' : all.includes(';') ? ';' : ','
  const rows = kept.map(({ line }) => (Papa.parse<string[]>(line, { delimiter }).data[0] ?? []).slice())
  for (const row of rows) while (row.length > 1 && row.at(-1)!.trim() === '') row.pop()
  return { rows, lines: kept.map(({ number }) => number), comma: delimiter !== ',' }
}

function axisFaults(
  axis: readonly number[],
  words: string,
  texts: readonly string[],
  place: (i: number) => [number, number],
): TableFault[] {
  const faults: TableFault[] = []
  axis.forEach((value, i) => {
    const [row, col] = place(i)
    if (!Number.isFinite(value))
      faults.push(fault(`The ${words} axis needs a number here, not “${texts[i] ?? ''}”.`, row, col, texts[i] ?? ''))
    else if (i > 0 && value === axis[i - 1])
      faults.push(fault(`The ${words} axis has ${value} twice.`, row, col, String(value)))
  })
  return faults
}

const direction = (axis: readonly number[]): 'up' | 'down' | 'neither' =>
  axis.every((value, i) => i === 0 || value > axis[i - 1]!)
    ? 'up'
    : axis.every((value, i) => i === 0 || value < axis[i - 1]!)
      ? 'down'
      : 'neither'

/** Reads a table. What cannot be used is said with its row and column (1-based, as in a spreadsheet) and how to mend it. */
export function readTable(text: string, rules: TableRules): TableReading {
  if (text.trimStart().startsWith('{')) {
    const read = readRevisionJson(text, rules.kind)
    const faults = read.ok ? checkAxes(read.grid.rpm, read.grid.mapKpa) : []
    return faults.length > 0 ? { ok: false, problems: faults } : read
  }
  const { rows, lines, comma } = rowsOf(text)
  if (rows.length < 3 || (rows[0]?.length ?? 0) < 3) {
    return {
      ok: false,
      problems: [
        fault('A table needs at least two breakpoints each way: axis values in the first row and in the first column.'),
      ],
    }
  }
  const head = rows[0]!
  const body = rows.slice(1)
  const acrossTexts = head.slice(1)
  const downTexts = body.map((row) => row[0] ?? '')
  const across = acrossTexts.map((each) => readCell(each, comma))
  const down = downTexts.map((each) => readCell(each, comma))
  const problems = [
    ...axisFaults(across, 'first row’s', acrossTexts, (i) => [lines[0]!, i + 2]),
    ...axisFaults(down, 'first column’s', downTexts, (i) => [lines[i + 1]!, 1]),
  ]
  if (across.length > maxBreakpoints || down.length > maxBreakpoints)
    problems.push(fault(`At most ${maxBreakpoints} breakpoints each way can be used.`))
  body.forEach((row, i) => {
    if (row.length !== head.length) {
      problems.push(
        fault(
          `This row has ${row.length - 1} values where the axis has ${across.length}.`,
          lines[i + 1]!,
          null,
          row.join(' ').slice(0, 60),
        ),
      )
    }
  })
  if (problems.length > 0) return { ok: false, problems: problems.slice(0, 20) }
  const acrossWay = direction(across)
  const downWay = direction(down)
  if (acrossWay === 'neither') problems.push(fault('The axis in the first row must only rise or only fall.', lines[0]!))
  if (downWay === 'neither') problems.push(fault('The axis in the first column must only rise or only fall.', null, 1))
  if (problems.length > 0) return { ok: false, problems }

  const rpmAcross = whichIsRpm(head[0] ?? '', across, down)
  if (rpmAcross === null) {
    return {
      ok: false,
      problems: [
        fault(
          'Cannot tell which axis is engine speed: one must reach at least 1500 rpm, the other is manifold pressure in kPa.',
        ),
      ],
    }
  }
  const values = body.map((row) => row.slice(1).map((each) => readCell(each, comma)))
  const notes: string[] = []
  const afr = rules.kind === 'target' && medianOf(values.flat()) > 5
  if (afr) notes.push(`Read as air-fuel ratios and divided by ${rules.stoichAfr}.`)
  const middle = medianOf(values.flat())
  if (rules.kind === 've' && middle < 3)
    notes.push(`The values are around ${middle.toPrecision(2)} %: if they are fractions, multiply them by 100 first.`)
  const checked = checkValues(values, body, lines, rules, afr)
  if (checked.length > 0) return { ok: false, problems: checked.slice(0, 20) }

  const rpm = (rpmAcross ? across : down).slice()
  const unit = mapUnitOf(head[0] ?? '')
  if (unit !== 'kPa') notes.push(`Manifold pressure was read as ${unit} absolute.`)
  const mapKpa = (rpmAcross ? down : across).map((each) => readMap(each, unit))
  const at = (mapIndex: number, rpmIndex: number) =>
    rpmAcross ? values[mapIndex]![rpmIndex]! : values[rpmIndex]![mapIndex]!
  const rpmFalls = rpm[0]! > rpm[1]!
  const mapFalls = mapKpa[0]! > mapKpa[1]!
  if (rpmFalls || mapFalls) notes.push('An axis ran downward; it was turned round.')
  const cells = new Float64Array(rpm.length * mapKpa.length)
  for (let row = 0; row < mapKpa.length; row += 1) {
    for (let col = 0; col < rpm.length; col += 1) {
      const value = at(mapFalls ? mapKpa.length - 1 - row : row, rpmFalls ? rpm.length - 1 - col : col)
      cells[row * rpm.length + col] = afr ? value / rules.stoichAfr : value
    }
  }
  if (rpmFalls) rpm.reverse()
  if (mapFalls) mapKpa.reverse()
  const axis = checkAxes(rpm, mapKpa)
  return axis.length > 0
    ? { ok: false, problems: axis }
    : {
        ok: true,
        grid: { rpm, mapKpa },
        values: cells,
        notes,
        halfPlace: halfPlaceOf(body) / (afr ? rules.stoichAfr : 1),
      }
}

/** Half of the last place of the value written with the most places. */
function halfPlaceOf(body: readonly string[][]): number {
  const places = body.flatMap((row) => row.slice(1).map((each) => /[.,](\d+)/.exec(each)?.[1]?.length ?? 0))
  return 0.5 * 10 ** -Math.max(...places)
}

/** True: engine speed runs along the first row. The corner may say so; else the larger numbers are rpm. */
function whichIsRpm(corner: string, across: readonly number[], down: readonly number[]): boolean | null {
  if (/rpm.*[\\/].*(kpa|bar|psi|map)/i.test(corner)) return false
  if (/(kpa|bar|psi|map).*[\\/].*rpm/i.test(corner)) return true
  const most = Math.max(...across)
  const other = Math.max(...down)
  if (most >= 1500 && other < 1000) return true
  if (other >= 1500 && most < 1000) return false
  return null
}

function medianOf(values: readonly number[]): number {
  const sorted = values.filter((value) => Number.isFinite(value)).sort((a, b) => a - b)
  return sorted[sorted.length >> 1] ?? Number.NaN
}

function checkAxes(rpm: readonly number[], mapKpa: readonly number[]): TableFault[] {
  const faults: TableFault[] = []
  if (rpm[0]! < 0 || rpm.at(-1)! > 20_000)
    faults.push(fault(`Engine speed from ${rpm[0]} to ${rpm.at(-1)} rpm cannot be right.`))
  if (mapKpa[0]! < 0 || mapKpa.at(-1)! > 500)
    faults.push(fault(`Manifold pressure from ${mapKpa[0]} to ${mapKpa.at(-1)} cannot be kPa absolute.`))
  if (mapKpa.at(-1)! < 40)
    faults.push(
      fault(`Manifold pressure ends at ${mapKpa.at(-1)}: in kPa a table reaches about 100. Is it in another unit?`),
    )
  return faults
}

function checkValues(
  values: readonly number[][],
  body: readonly string[][],
  lines: readonly number[],
  rules: TableRules,
  afr: boolean,
): TableFault[] {
  const [low, high, words] =
    rules.kind === 've'
      ? [1, 200, 'A volumetric efficiency in %']
      : afr
        ? [5, 25, 'An air-fuel ratio']
        : [0.5, 1.6, 'A target lambda']
  const faults: TableFault[] = []
  values.forEach((row, i) =>
    row.forEach((value, j) => {
      const text = body[i]![j + 1] ?? ''
      if (!Number.isFinite(value)) faults.push(fault(`“${text}” is not a number.`, lines[i + 1]!, j + 2, text))
      else if (value < low || value > high)
        faults.push(fault(`${words} lies between ${low} and ${high}; here it is ${text}.`, lines[i + 1]!, j + 2, text))
    }),
  )
  return faults
}
