/** Which column is which channel: by name, then by unit and the numbers; doubtful ones are asked about. */
import type { ChannelName, ColumnMapping } from '../../../shared/contract/logs.ts'
import {
  conversion,
  guessUnit,
  isAirFuelRatio,
  isGauge,
  percentOfBase,
  saysNoUnit,
  standardAtmosphereKpa,
  storedUnit,
} from './convert.ts'
import { isOpenName, namesBoost, recogniseName } from './names.ts'

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

type Guess = { unit: string; confidence: number; reason: string } | { unit: null; reason: string }

const range = ({ low, high }: Spread): string => `runs from ${low.toPrecision(3)} to ${high.toPrecision(3)}`
const isLambda = (channel: ChannelName): boolean => channel === 'lambda' || channel === 'targetLambda'
const isCorrection = (channel: ChannelName): boolean => ['trim', 'warmup', 'afterStart', 'accel'].includes(channel)

/** A written unit is believed unless the numbers cannot be in it; then it is asked about, or read as gauge. */
function writtenUnit(channel: ChannelName, title: string, unit: string, spread: Spread): Guess {
  const sure = { unit, confidence: 0.98, reason: 'By its name and unit' }
  if (spread.count === 0) return sure
  if (channel === 'map' && !isGauge(unit)) {
    if (spread.low < 0 || (namesBoost(title) && !/a(bs(olute)?)?\W*$/i.test(unit)))
      return {
        unit: `${unit} gauge`,
        confidence: 0.7,
        reason: `It ${spread.low < 0 ? 'falls below zero' : 'is called boost'}, so it is read as gauge pressure and the air outside is added`,
      }
  }
  if (isCorrection(channel) && /%|percent|pct/i.test(unit) && spread.low >= 50)
    return {
      unit: percentOfBase,
      confidence: 0.7,
      reason: 'It never falls below 50 %, so 100 % is read as no correction',
    }
  if (isLambda(channel) && isAirFuelRatio(unit) !== spread.median > 3 && !/phi/i.test(unit))
    return { unit: null, reason: `It is written as ${unit} and ${range(spread)}, which do not go together` }
  return sure
}

/** Without a written unit the size of the numbers tells it, where it can. */
function unwrittenUnit(channel: ChannelName, title: string, values: Numbers, spread: Spread): Guess {
  const open = { unit: null, reason: `It has no unit that Evenburn knows and ${range(spread)}` } as const
  if (channel === 'time' && spread.count === 0) return { unit: null, reason: 'It holds no time that Evenburn can read' }
  if (isOpenName(title)) return open
  const unit =
    channel === 'time'
      ? timeUnit(values)
      : isLambda(channel) && /^\W*phi\W*$/i.test(title)
        ? 'phi'
        : spread.count === 0
          ? storedUnit[channel]
          : guessUnit(channel, spread.median, spread.low, spread.high)
  if (unit === null || (namesBoost(title) && channel === 'map')) return open
  return { unit, confidence: 0.8, reason: 'By its name; the unit by the size of the numbers' }
}

/**
 * Guesses the mapping of every column. A unit that is written but unknown is asked about, never guessed over: volts of a
 * sensor look like lambda, bar or degrees.
 * @param columns One per header entry.
 */
export function recogniseColumns(
  header: readonly string[],
  units: readonly string[],
  columns: readonly Numbers[],
  stoichAfr: number,
): ColumnMapping[] {
  const taken = new Set<ChannelName>()
  const mapping = header.map((title, index): ColumnMapping => {
    const channel = recogniseName(title)
    const written = units[index] ?? ''
    const unused = (reason: string) => ({ index, header: title, unit: written, channel: null, confidence: 0, reason })
    if (!channel) return unused('The name is not one Evenburn knows')
    if (taken.has(channel)) return unused(`Another column is already ${channel}`)
    const spread = spreadOf(columns[index]!)
    if (!saysNoUnit(written) && conversion(channel, written, stoichAfr) === null)
      return unused(`Its name says ${channel}, but “${written}” is no unit of that which Evenburn knows`)
    const guess = saysNoUnit(written)
      ? unwrittenUnit(channel, title, columns[index]!, spread)
      : writtenUnit(channel, title, written, spread)
    if (guess.unit === null) return unused(guess.reason)
    taken.add(channel)
    return { index, header: title, channel, ...guess }
  })
  return temperaturesAlike(mapping)
}

/** A log gives its temperatures in one unit: intake air of 90 alone could be either, beside coolant of 190 it cannot. */
function temperaturesAlike(mapping: readonly ColumnMapping[]): ColumnMapping[] {
  const coolant = mapping.find(({ channel }) => channel === 'ect')
  return mapping.map((column) =>
    column.channel === 'iat' && column.confidence === 0.8 && coolant && column.unit === 'C'
      ? { ...column, unit: coolant.unit, reason: 'By its name; the unit is that of the coolant' }
      : column,
  )
}

/** Channels that learning cannot do without. */
export const neededChannels: readonly ChannelName[] = ['time', 'rpm', 'map', 'lambda']

export const missingChannels = (mapping: readonly ColumnMapping[]): ChannelName[] =>
  neededChannels.filter(
    (channel) => !mapping.some((column) => column.channel === channel && isConvertible(column.channel, column.unit)),
  )

/** Whether a unit is known does not depend on the fuel. */
const isConvertible = (channel: ChannelName, unit: string): boolean => conversion(channel, unit, 14.7) !== null

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
  const outsideKpa = outsidePressure(mapping, columns, stoichAfr)
  for (const { channel, index, unit } of mapping) {
    const values = columns[index]
    if (channel === null || !values) continue
    const convert = conversion(channel, unit, stoichAfr, outsideKpa)
    if (!convert) continue
    channels.set(
      channel,
      channel === 'time' ? evenTime(Float64Array.from(values, convert)) : Float32Array.from(values, convert),
    )
  }
  return channels
}

/** What gauge pressure is measured from: the log's own barometer where it has one, else the standard atmosphere. */
function outsidePressure(mapping: readonly ColumnMapping[], columns: readonly Numbers[], stoichAfr: number): number {
  const baro = mapping.find(({ channel }) => channel === 'baro')
  const convert = baro && !isGauge(baro.unit) ? conversion('baro', baro.unit, stoichAfr) : null
  const kpa = convert && baro ? convert(spreadOf(columns[baro.index] ?? []).median) : Number.NaN
  // A key-on reading outside 50 to 108 kPa is a fault, not weather: US Standard Atmosphere 1976.
  return kpa >= 50 && kpa <= 108 ? kpa : standardAtmosphereKpa
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
