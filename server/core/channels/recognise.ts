/** Which column is which channel: by name, then by unit and the numbers; doubtful ones are asked about. */
import type { ChannelName, ColumnMapping } from '../../../shared/contract/logs.ts'
import { conversion, guessUnit } from './convert.ts'
import { recogniseName } from './names.ts'

type Numbers = Float32Array | Float64Array

export interface Spread {
  readonly low: number
  readonly median: number
  readonly high: number
  readonly count: number
}

/** Lowest, middle and highest of up to 20 000 evenly chosen readings; NaN where there is none. */
export function spreadOf(values: ArrayLike<number>): Spread {
  const stride = Math.max(1, Math.floor(values.length / 20_000))
  const kept: number[] = []
  for (let i = 0; i < values.length; i += stride) if (Number.isFinite(values[i]!)) kept.push(values[i]!)
  const sorted = Float64Array.from(kept).sort()
  const n = sorted.length
  return n === 0
    ? { low: Number.NaN, median: Number.NaN, high: Number.NaN, count: 0 }
    : { low: sorted[0]!, median: sorted[n >> 1]!, high: sorted[n - 1]!, count: n }
}

/** A unit for time without one: milliseconds where steps are tens and hundreds. */
function timeUnit(values: Numbers): string {
  const steps: number[] = []
  for (let i = 1; i < values.length && i < 500; i += 1) {
    const step = values[i]! - values[i - 1]!
    if (step > 0) steps.push(step)
  }
  steps.sort((a, b) => a - b)
  return (steps[steps.length >> 1] ?? 0) >= 5 ? 'ms' : 's'
}

/**
 * Guesses the mapping of every column.
 * @param columns One per header entry.
 */
export function recogniseColumns(
  header: readonly string[],
  units: readonly string[],
  columns: readonly Numbers[],
  stoichAfr: number,
): ColumnMapping[] {
  const taken = new Set<ChannelName>()
  return header.map((title, index) => {
    const named = recogniseName(title)
    const written = units[index] ?? ''
    const unused = (reason: string): ColumnMapping => ({
      index,
      header: title,
      unit: written,
      channel: null,
      confidence: 0,
      reason,
    })
    if (!named) return unused('The name is not one Evenburn knows')
    if (taken.has(named)) return unused(`Another column is already ${named}`)
    const values = columns[index]!
    const spread = spreadOf(values)
    const isAfr = (named === 'lambda' || named === 'targetLambda') && /afr|ratio/i.test(title)
    const known = written !== '' && conversion(named, written, stoichAfr) !== null
    const unit = known
      ? written
      : isAfr && spread.median > 5
        ? 'AFR'
        : named === 'time'
          ? timeUnit(values)
          : guessUnit(named, spread.median, spread.low, spread.high)
    if (unit === null) {
      return unused(
        `It has no unit that Evenburn knows and runs from ${spread.low.toPrecision(3)} to ${spread.high.toPrecision(3)}`,
      )
    }
    taken.add(named)
    return {
      index,
      header: title,
      unit,
      channel: named,
      confidence: known ? 0.98 : 0.8,
      reason: known ? 'By its name and unit' : 'By its name; the unit by the size of the numbers',
    }
  })
}

/** Channels that learning cannot do without. */
export const neededChannels: readonly ChannelName[] = ['time', 'rpm', 'map', 'lambda']

export const missingChannels = (mapping: readonly ColumnMapping[]): ChannelName[] =>
  neededChannels.filter((channel) => !mapping.some((column) => column.channel === channel))

/**
 * Converts mapped columns to the units channels are stored in; the time starts at 0 and never runs backward.
 * @returns one array per channel, all as long as the log.
 */
export function toChannels(
  mapping: readonly ColumnMapping[],
  columns: readonly Numbers[],
  stoichAfr: number,
): Map<ChannelName, Float32Array | Float64Array> {
  const channels = new Map<ChannelName, Float32Array | Float64Array>()
  for (const { channel, index, unit } of mapping) {
    const values = columns[index]
    if (channel === null || !values) continue
    const convert = conversion(channel, unit, stoichAfr)
    if (!convert) continue
    channels.set(
      channel,
      channel === 'time' ? evenTime(Float64Array.from(values, convert)) : Float32Array.from(values, convert),
    )
  }
  return channels
}

/** Time from 0; where the clock restarts or stands, it goes on by the median step, so that time always grows. */
export function evenTime(seconds: Float64Array): Float64Array {
  const steps: number[] = []
  for (let i = 1; i < seconds.length; i += 1) {
    const step = seconds[i]! - seconds[i - 1]!
    if (step > 0) steps.push(step)
  }
  steps.sort((a, b) => a - b)
  const usual = steps[steps.length >> 1] ?? 0.1
  const even = new Float64Array(seconds.length)
  for (let i = 1; i < seconds.length; i += 1) {
    const step = seconds[i]! - seconds[i - 1]!
    even[i] = even[i - 1]! + (step > 0 && step < 3600 ? step : usual)
  }
  return even
}
