/** The state of each channel in one sentence: dead, a caution, sound, or absent. */
import { channelNames, type ChannelHealth, type ChannelName } from '../../../shared/contract/logs.ts'
import { storedUnit } from './convert.ts'
import { longestStillS, noiseOf, rhythmOf, stepOf } from './measures.ts'
import { spreadOf, type Spread } from './recognise.ts'

export interface HealthFacts {
  readonly boosted: boolean
  readonly lambdaLow: number
  readonly lambdaHigh: number
  readonly rateHz: number
}

type Verdict = readonly ['dead' | 'caution' | 'sound', string]
type Channels = ReadonlyMap<ChannelName, ArrayLike<number>>

const mustMove: readonly ChannelName[] = ['rpm', 'map', 'lambda', 'ect', 'iat', 'tp', 'battery']
const share = (values: ArrayLike<number>, test: (value: number) => boolean): number => {
  let hits = 0
  for (let i = 0; i < values.length; i += 1) if (test(values[i]!)) hits += 1
  return hits / Math.max(1, values.length)
}
const pct = (part: number): string => `${(100 * part).toFixed(part < 0.1 ? 1 : 0)} %`

/** What a channel that cannot be trusted spoils further on, and where to look. */
const spoils: Partial<Record<ChannelName, string>> = {
  rpm: 'Without it no reading has a cell. Look at the speed sensor and its gap.',
  map: 'Without it no reading has a cell. Look at the hose to the sensor and its plug.',
  lambda: 'Without it nothing can be learned but from trims. Look at the sensor, its heater and its earth.',
  ect: 'Nobody knows whether the engine was warm, so warm-up fuel passes for the table’s. Look at its plug first.',
  iat: 'The air mass is a guess then: 5 °C of error moves every cell by 1.7 %. Look at its plug first.',
  tp: 'Tip-in and overrun can no longer be told apart from cruising. Look at its plug and its resting place.',
  battery: 'Injector dead time follows the voltage, so small pulses are a guess.',
}

/** Resolution that hides what the learner looks for: common practice. */
const coarse: Partial<Record<ChannelName, number>> = { map: 2, lambda: 0.04, rpm: 60 }
/** Fewer rows say nothing of steps, noise or rhythm. */
const enoughRows = 20
/** Readings of a running engine are never still for this long. */
const frozenS = 6
const short = (value: number): string => String(Number(value.toPrecision(2)))

function judgeRhythm(channels: Channels, facts: HealthFacts): Verdict {
  const [time, rpm, map] = [channels.get('time'), channels.get('rpm'), channels.get('map')]
  const rows = `${facts.rateHz.toFixed(facts.rateHz < 5 ? 1 : 0)} rows a second.`
  if (!time || !rpm || !map || time.length < enoughRows) return ['sound', rows]
  const { rowS, readingS, gaps, longestGapS } = rhythmOf(time, rpm, map)
  if (readingS > 1.2 && Number.isFinite(readingS))
    return [
      'caution',
      `A new reading every ${readingS.toFixed(2)} s though rows come every ${rowS.toFixed(2)} s: too slow for anything but steady running. Log fewer channels.`,
    ]
  if (gaps > 0)
    return ['caution', `${gaps} ${gaps === 1 ? 'gap' : 'gaps'}, the longest ${longestGapS.toFixed(1)} s. ${rows}`]
  return readingS > 1.5 * rowS ? ['sound', `${rows} A new reading every ${readingS.toFixed(2)} s.`] : ['sound', rows]
}

/** Faults that show only beside time or another channel; null where there is none. */
function judgeBeside(channel: ChannelName, values: ArrayLike<number>, channels: Channels): Verdict | null {
  const time = channels.get('time')
  const rpm = channels.get('rpm')
  if (time && (channel === 'rpm' || channel === 'map')) {
    const turning = rpm ? spreadOf(rpm).low > 300 : false
    const still = longestStillS(values, time)
    if (turning && still > frozenS)
      return ['caution', `Frozen for ${still.toFixed(0)} s while the engine turned. ${spoils[channel]}`]
  }
  const ect = channels.get('ect')
  if (channel === 'iat' && ect) {
    const [air, coolant] = [spreadOf(values).median, spreadOf(ect).median]
    if (coolant > 60 && air > coolant)
      return [
        'caution',
        `Hotter than the coolant (${air.toFixed(0)} °C): the two may be swapped, or the unit is wrong.`,
      ]
  }
  const step = stepOf(values)
  const least = coarse[channel]
  if (least !== undefined && values.length >= enoughRows && step >= least)
    return ['caution', `Moves in steps of ${short(step)} ${storedUnit[channel]}: too coarse to trust small changes.`]
  return null
}

const movesWell = (channel: ChannelName, values: ArrayLike<number>): string => {
  const step = stepOf(values)
  const noise = noiseOf(values)
  if (!Number.isFinite(step) || values.length < enoughRows) return 'Moves as it should.'
  // Noise far below a step cannot be seen: what is left of it is arithmetic.
  return noise < step / 10
    ? `Moves as it should, in steps of ${short(step)} ${storedUnit[channel]}.`
    : `Moves as it should: steps of ${short(step)}, noise about ${short(noise)} ${storedUnit[channel]}.`
}

/** A thermistor circuit that is open or shorted reads the end of its range: common practice, no source. */
const openCircuit = (low: number, high: number): string | null =>
  low === high && low <= -35
    ? `Never moves from ${low} °C, which an open circuit reads.`
    : low === high && low >= 140
      ? `Never moves from ${low} °C, which a short circuit reads.`
      : null

function judge(
  channel: ChannelName,
  values: ArrayLike<number>,
  spread: Spread,
  facts: HealthFacts,
  channels: Channels,
): Verdict {
  const { low, high, median } = spread
  if (spread.count === 0) return ['dead', 'Sends nothing: every row is blank.']
  if (channel === 'ect' || channel === 'iat') {
    const circuit = openCircuit(low, high)
    if (circuit) return ['dead', circuit]
    if (channel === 'ect' && high < 60)
      return ['caution', `Never warmer than ${high.toFixed(0)} °C: nothing of it can be learned from.`]
    if (channel === 'iat' && low === high) return ['sound', `Steady at ${low.toFixed(0)} °C throughout.`]
  }
  if (low === high && mustMove.includes(channel)) return ['dead', `Never moves from ${low.toPrecision(3)}.`]
  const blank = share(values, (value) => !Number.isFinite(value))
  if (blank > 0.02) return ['caution', `Blank in ${pct(blank)} of the rows.`]
  if (channel === 'map') {
    if (low < 5 || high > 400)
      return ['caution', `Runs from ${low.toFixed(0)} to ${high.toFixed(0)} kPa: look at its unit and calibration.`]
    if (!facts.boosted && high > 112) return ['caution', `Reads ${high.toFixed(0)} kPa on an engine without boost.`]
  }
  if (channel === 'lambda') {
    const dropout = share(values, (value) => value < facts.lambdaLow - 0.06)
    const rich = share(values, (value) => value >= facts.lambdaLow - 0.06 && value <= facts.lambdaLow + 0.012)
    const lean = share(values, (value) => value >= facts.lambdaHigh - 0.012)
    if (median > 5) return ['caution', 'Reads like an air-fuel ratio, not lambda: set its unit.']
    if (rich + lean > 0.9) return ['dead', 'Stands at the end of its range nearly all the time.']
    if (dropout > 0.002) return ['caution', `Drops out for ${pct(dropout)} of the time.`]
    if (rich > 0.02)
      return ['caution', `At its rich limit ${pct(rich)} of the time; it can only say “at least that rich”.`]
    if (lean > 0.25) return ['caution', `At its lean limit ${pct(lean)} of the time.`]
  }
  if (channel === 'battery' && low < 10.5) return ['caution', `Sags to ${low.toFixed(1)} V.`]
  if (channel === 'tp' && low > 1.5) return ['caution', `Rests at ${low.toFixed(1)}, not 0.`]
  if (channel === 'tp' && high < 25) return ['caution', `Never opens beyond ${high.toFixed(0)} %.`]
  if (channel === 'time') return judgeRhythm(channels, facts)
  return (
    judgeBeside(channel, values, channels) ?? [
      'sound',
      low === high ? `Steady at ${low.toPrecision(3)} throughout.` : movesWell(channel, values),
    ]
  )
}

/** Health of every channel, the worst first; channels that the file lacks come last. */
export function channelHealth(channels: Channels, facts: HealthFacts): ChannelHealth[] {
  const order = { dead: 0, caution: 1, sound: 2, absent: 3 } as const
  const finite = (value: number): number | null => (Number.isFinite(value) ? value : null)
  return channelNames
    .map((channel): ChannelHealth => {
      const values = channels.get(channel)
      if (!values) {
        return {
          channel,
          state: 'absent',
          unit: storedUnit[channel],
          lowest: null,
          median: null,
          highest: null,
          remark: 'Not in this file.',
        }
      }
      const spread = spreadOf(values)
      const [state, seen] = judge(channel, values, spread, facts, channels)
      const remark = state === 'dead' && spoils[channel] ? `${seen} ${spoils[channel]}` : seen
      return {
        channel,
        state,
        unit: storedUnit[channel],
        lowest: finite(spread.low),
        median: finite(spread.median),
        highest: finite(spread.high),
        remark,
      }
    })
    .sort((a, b) => order[a.state] - order[b.state])
}
