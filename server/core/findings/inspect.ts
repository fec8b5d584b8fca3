/** One look over a whole log: findings, what cannot teach, where the drive went, how each channel is spread. */
import { cornerAt, type Grid } from '../../../shared/grid.ts'
import type { ChannelName, Histogram, Inspection } from '../../../shared/contract/logs.ts'
import { storedUnit } from '../channels/convert.ts'
import type { Drive, EngineFacts } from '../drive.ts'
import { maskDrive, maskNames, stepS } from '../evidence/masks.ts'
import { findingsOf } from './index.ts'
import { median, viewOf, type ViewFacts } from './view.ts'

type Columns = ReadonlyMap<ChannelName, Float64Array>

export interface InspectionInput {
  readonly columns: Columns
  readonly facts: ViewFacts
  /** The same log as the learner takes it; null where no table is known that was in the engine. */
  readonly teaching: { readonly drive: Drive; readonly engine: EngineFacts } | null
}

/** Stretches shorter than this are bridged or left away: a plot cannot show them. */
const leastShownS = 0.25

function leftOutOf(drive: Drive, engine: EngineFacts): Inspection['leftOut'] {
  const { timeS } = drive
  const steps = Array.from(timeS.subarray(1), (t, i) => t - timeS[i]!)
  const masks = maskDrive(drive, engine, drive.flashed.grid, median(steps))
  const start = timeS[0] ?? 0
  const found: { fromS: number; toS: number; reason: string }[] = []
  for (let i = 0; i < masks.length; i += 1) {
    const reason = maskNames[masks[i]!]!
    if (reason === 'used') continue
    const fromS = timeS[i]! - start
    const toS = fromS + stepS(timeS, i)
    const last = found.at(-1)
    if (last?.reason === reason && fromS - last.toS < leastShownS) last.toS = toS
    else found.push({ fromS, toS, reason })
  }
  return found.filter(({ fromS, toS }) => toS - fromS >= leastShownS)
}

function pathOver(columns: Columns, grid: Grid | null): Inspection['path'] {
  const [time, rpm, map] = [columns.get('time'), columns.get('rpm'), columns.get('map')]
  if (!grid || !time || !rpm || !map) return null
  const seconds = new Array<number>(grid.rpm.length * grid.mapKpa.length).fill(0)
  for (let i = 0; i < time.length; i += 1) {
    // NaN fails the comparison too: a blank reading was nowhere.
    if (!(rpm[i]! > 300) || !Number.isFinite(map[i]!)) continue
    const { cells, weights } = cornerAt(grid, rpm[i]!, map[i]!)
    const nearest = cells[weights.indexOf(Math.max(...weights))]!
    seconds[nearest]! += stepS(time, i)
  }
  return { grid: { rpm: [...grid.rpm], mapKpa: [...grid.mapKpa] }, seconds }
}

const bins = 32

/** @returns null where the channel holds no reading. */
export function histogramOf(channel: ChannelName, values: Float64Array, timeS: Float64Array): Histogram | null {
  let low = Infinity
  let high = -Infinity
  for (const value of values) {
    if (!Number.isFinite(value)) continue
    low = Math.min(low, value)
    high = Math.max(high, value)
  }
  if (high < low) return null
  const seconds = new Array<number>(high === low ? 1 : bins).fill(0)
  values.forEach((value, i) => {
    if (!Number.isFinite(value)) return
    const bin = high === low ? 0 : Math.min(bins - 1, Math.floor((bins * (value - low)) / (high - low)))
    seconds[bin]! += stepS(timeS, i)
  })
  return { channel, unit: storedUnit[channel], low, high, seconds }
}

export function inspect({ columns, facts, teaching }: InspectionInput): Inspection {
  const view = viewOf(columns, facts)
  const time = columns.get('time')
  return {
    findings: view ? findingsOf(view) : [],
    leftOut: teaching ? leftOutOf(teaching.drive, teaching.engine) : null,
    path: pathOver(columns, facts.grid),
    histograms: time
      ? [...columns].flatMap(([channel, values]) =>
          channel === 'time' ? [] : (histogramOf(channel, values, time) ?? []),
        )
      : [],
  }
}
