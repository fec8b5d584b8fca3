/** The rows the benchmark prints and writes: what was measured, against which bar, beside which peer. */
import { mkdirSync, writeFileSync } from 'node:fs'

export interface Row {
  readonly group: string
  readonly name: string
  readonly value: number
  readonly unit: string
  readonly bar: string | null
  readonly stretch: string | null
  readonly peer: string | null
  /** Null where there is no bar. */
  readonly ok: boolean | null
}

const rows: Row[] = []

/** Prints a row and keeps it. */
export function note(row: Partial<Row> & Pick<Row, 'group' | 'name' | 'value' | 'unit'>): void {
  const full: Row = { bar: null, stretch: null, peer: null, ok: null, ...row }
  rows.push(full)
  const verdict = full.ok === null ? '' : full.ok ? ', met' : ', NOT MET'
  const bar = full.bar ? ` (bar ${full.bar}${full.stretch ? `, stretch ${full.stretch}` : ''}${verdict})` : ''
  const peer = full.peer ? ` against ${full.peer}` : ''
  const value = Number.isFinite(full.value) ? `${Number(full.value.toPrecision(3))} ${full.unit}` : full.unit
  console.log(`${full.name}${peer}: ${value}${bar}`)
}

/** A row that must not exceed, or not fall below, its bar. */
export function judge(
  group: string,
  name: string,
  value: number,
  unit: string,
  bar: { atMost?: number; atLeast?: number; stretch?: number; peer?: string },
): void {
  const { atMost, atLeast, stretch, peer } = bar
  const words = [atLeast === undefined ? '' : `at least ${atLeast}`, atMost === undefined ? '' : `at most ${atMost}`]
  note({
    group,
    name,
    value,
    unit,
    bar: words.filter(Boolean).join(', '),
    stretch: stretch === undefined ? null : String(stretch),
    peer: peer ?? null,
    ok: value <= (atMost ?? Infinity) && value >= (atLeast ?? -Infinity),
  })
}

export const notMeasured = (group: string, name: string, peer: string): void =>
  note({ group, name, value: Number.NaN, unit: 'not measured', peer })

/** A line that is written over by the next: work goes on, nothing is claimed. Only where a person watches. */
export function progress(text: string): void {
  if (process.stderr.isTTY) process.stderr.write(`\r\u001b[K${text}`)
}

export function writeReport(): void {
  mkdirSync('.data', { recursive: true })
  writeFileSync('.data/bench.json', `${JSON.stringify(rows, null, 2)}\n`)
  const missed = rows.filter((row) => row.ok === false)
  console.log(
    `\n${rows.length} rows, ${missed.length} bars not met${missed.map((row) => `\n  ${row.group}: ${row.name}`).join('')}`,
  )
}

export const median = (values: readonly number[]): number => values.toSorted((x, y) => x - y)[values.length >> 1]!
export const mean = (values: readonly number[]): number => values.reduce((sum, each) => sum + each, 0) / values.length
export const rms = (values: readonly number[]): number => Math.sqrt(mean(values.map((value) => value * value)))

/** Smallest of a few runs, s: whatever else the machine does only ever adds. */
export function timed(work: () => void, runs = 3): number {
  return Math.min(
    ...Array.from({ length: runs }, () => {
      const start = performance.now()
      work()
      return (performance.now() - start) / 1000
    }),
  )
}
