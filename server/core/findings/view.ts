/** What every detector is given: one drive as columns, what was asked for, and what follows from both once. */
import { cornerAt, valueAt, type Grid } from '../../../shared/grid.ts'
import type { ChannelName, Finding } from '../../../shared/contract/logs.ts'

export interface ViewFacts {
  readonly lambdaLow: number
  readonly lambdaHigh: number
  readonly deadTimeMs: number
  /** Axes of the table that cells are named on; null where none is known. */
  readonly grid: Grid | null
  /** Asked for where the log holds no target column. */
  readonly target: { readonly grid: Grid; readonly lambda: ArrayLike<number> } | null
}

/** All columns have n readings; a missing one is NaN. A channel that the file lacks is undefined. */
export interface DriveView {
  readonly n: number
  readonly timeS: Float64Array
  readonly dtS: number
  /** 1/min. */
  readonly rpm: Float64Array
  /** kPa, absolute. */
  readonly map: Float64Array
  readonly lambda: Float64Array | undefined
  /** Lambda asked for: the target, made richer by warm-up and after-start, not by acceleration and not by the trim. */
  readonly asked: Float64Array
  /** Measured over what was asked for when that mixture was burnt, somewhere within `pathS`; NaN where unknown. */
  readonly ratio: Float64Array
  readonly columns: ReadonlyMap<ChannelName, Float64Array>
  /** 1 where the foot is off the pedal. */
  readonly closed: Uint8Array
  /** 1 where no fuel was injected. */
  readonly cut: Uint8Array
  /** Seconds since the last cut row; Infinity before the first. */
  readonly sinceCutS: Float64Array
  /** 1/min, the median with the throttle closed and low speed. */
  readonly idleRpm: number
  readonly idle: Uint8Array
  readonly baroKpa: number
  readonly facts: ViewFacts
}

export type Detector = (view: DriveView) => Finding | null

export function quantile(values: readonly number[], share: number): number {
  const sorted = values.filter(Number.isFinite).sort((a, b) => a - b)
  return sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))] ?? Number.NaN
}

export const median = (values: ArrayLike<number>): number => quantile(Array.from(values), 0.5)

/** Off the pedal by the throttle's own resting place; without a throttle, by low manifold pressure. */
function closedThrottle(tp: Float64Array | undefined, map: Float64Array, baroKpa: number): Uint8Array {
  const rest = tp ? quantile(Array.from(tp), 0.02) : 0
  return Uint8Array.from(map, (kPa, i) => Number(tp ? tp[i]! <= rest + 1.5 : kPa < 0.42 * baroKpa))
}

function askedLambda(columns: DriveView['columns'], rpm: Float64Array, map: Float64Array, facts: ViewFacts) {
  const logged = columns.get('targetLambda')
  const { target } = facts
  return rpm.map((speed, i) => {
    const base = logged?.[i] ?? (target ? valueAt(target.grid, target.lambda, speed, map[i]!) : 1)
    const warm = 1 + (columns.get('warmup')?.[i] ?? 0) / 100
    const after = 1 + (columns.get('afterStart')?.[i] ?? 0) / 100
    return base / warm / after
  })
}

/** The longest a mixture is on its way to the sensor and through it, s: common practice. */
const pathS = 0.6

/** A reading between the richest and the leanest asked for within `pathS` is as asked: 1. Beyond, it is held against the nearer. */
function ratioOf(timeS: Float64Array, lambda: Float64Array | undefined, asked: Float64Array, cut: Uint8Array) {
  let from = 0
  return asked.map((_, i) => {
    while (timeS[i]! - timeS[from]! > pathS) from += 1
    if (!lambda || cut[i]) return Number.NaN
    const { low, high } = reach(asked, { from, to: i })
    const seen = lambda[i]!
    return seen > high ? seen / high : seen < low ? seen / low : Number.isFinite(seen) ? 1 : Number.NaN
  })
}

/** Null where time, engine speed or manifold pressure is missing: nothing can be said then. */
export function viewOf(columns: DriveView['columns'], facts: ViewFacts): DriveView | null {
  const timeS = columns.get('time')
  const rpm = columns.get('rpm')
  const map = columns.get('map')
  if (!timeS || !rpm || !map || timeS.length < 20) return null
  const n = timeS.length
  const lambda = columns.get('lambda')
  const pulse = columns.get('pulseWidth')
  const baro = columns.get('baro')
  const baroKpa = baro ? median(baro) : 101.325
  const closed = closedThrottle(columns.get('tp'), map, baroKpa)
  const asked = askedLambda(columns, rpm, map, facts)
  const cut = Uint8Array.from(rpm, (speed, i) =>
    Number(
      pulse
        ? pulse[i]! < 0.05 && speed > 300
        : lambda !== undefined && closed[i] === 1 && lambda[i]! >= facts.lambdaHigh - 0.012 && speed > 1200,
    ),
  )
  const sinceCutS = new Float64Array(n).fill(Infinity)
  for (let i = 0, last = -Infinity; i < n; i += 1) {
    if (cut[i]) last = timeS[i]!
    sinceCutS[i] = timeS[i]! - last
  }
  const slow = Array.from(rpm).filter((speed, i) => closed[i] === 1 && speed > 300 && speed < 1300)
  const idleRpm = slow.length > 20 ? quantile(slow, 0.5) : 850
  return {
    n,
    timeS,
    dtS: (timeS[n - 1]! - timeS[0]!) / (n - 1),
    rpm,
    map,
    lambda,
    asked,
    ratio: ratioOf(timeS, lambda, asked, cut),
    columns,
    closed,
    cut,
    sinceCutS,
    idleRpm,
    idle: Uint8Array.from(rpm, (speed, i) => Number(closed[i] === 1 && speed > 300 && speed < 1.35 * idleRpm)),
    baroKpa,
    facts,
  }
}

/** Rows from..to, both included. */
export interface Rows {
  readonly from: number
  readonly to: number
}

/** Runs of rows that pass, at least `leastS` long; gaps up to `bridgeS` are bridged. */
export function runsWhere(view: DriveView, test: (row: number) => boolean, leastS: number, bridgeS = 0): Rows[] {
  const runs: { from: number; to: number }[] = []
  for (let i = 0; i < view.n; i += 1) {
    if (!test(i)) continue
    const last = runs.at(-1)
    const gapS = last ? view.timeS[i]! - view.timeS[last.to]! : Infinity
    if (last && (i === last.to + 1 ? gapS < 1 + 3 * view.dtS : gapS <= bridgeS)) last.to = i
    else runs.push({ from: i, to: i })
  }
  return runs.filter(({ from, to }) => view.timeS[to]! - view.timeS[from]! + view.dtS >= leastS)
}

/** First row at or after a time before or after `row`. */
export function rowAfter(view: DriveView, row: number, seconds: number): number {
  const wanted = view.timeS[row]! + seconds
  let at = row
  while (seconds > 0 && at + 1 < view.n && view.timeS[at]! < wanted) at += 1
  while (seconds < 0 && at > 0 && view.timeS[at]! > wanted) at -= 1
  return at
}

/** Lowest and highest finite value in the rows. */
export function reach(values: ArrayLike<number>, { from, to }: Rows): { low: number; high: number } {
  let low = Infinity
  let high = -Infinity
  for (let i = from; i <= to; i += 1) {
    if (values[i]! < low) low = values[i]!
    if (values[i]! > high) high = values[i]!
  }
  return { low, high }
}

/** The throttle, or without one the manifold pressure, has been pressed down within the seconds before the row. */
export function pressedWithin(view: DriveView, row: number, seconds: number): boolean {
  const before = { from: rowAfter(view, row, -seconds), to: row }
  const tp = view.columns.get('tp')
  const { low } = reach(tp ?? view.map, before)
  const { high } = reach(tp ?? view.map, before)
  return high - low > (tp ? 6 : 8)
}

/** Cells that carry most of the weight over the rows, most visited first, at most twelve. */
function cellsOf(view: DriveView, runs: readonly Rows[]): number[] {
  const { grid } = view.facts
  if (!grid) return []
  const rows = new Map<number, number>()
  for (const { from, to } of runs) {
    for (let i = from; i <= to; i += 1) {
      if (!Number.isFinite(view.rpm[i]! + view.map[i]!)) continue
      const { cells, weights } = cornerAt(grid, view.rpm[i]!, view.map[i]!)
      const cell = cells[weights.indexOf(Math.max(...weights))]!
      rows.set(cell, (rows.get(cell) ?? 0) + 1)
    }
  }
  return [...rows]
    .sort((a, b) => b[1] - a[1] || a[0] - b[0])
    .slice(0, 12)
    .map(([cell]) => cell)
}

/** A finding over the runs; null where there is none. The stretches are in the order of time, at most twenty. */
export function finding(
  view: DriveView,
  runs: readonly Rows[],
  words: Pick<Finding, 'kind' | 'urgency' | 'title' | 'usually'>,
  numbers: readonly (readonly [label: string, value: number, unit: string])[],
): Finding | null {
  if (runs.length === 0) return null
  return {
    ...words,
    times: runs.length,
    stretches: runs
      .slice(0, 20)
      .map(({ from, to }) => ({ fromS: view.timeS[from]! - view.timeS[0]!, toS: view.timeS[to]! - view.timeS[0]! })),
    numbers: numbers.map(([label, value, unit]) => ({ label, value: Number(value.toPrecision(3)), unit })),
    cells: cellsOf(view, runs),
  }
}
