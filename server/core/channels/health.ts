/** The state of each channel in one sentence: dead, a caution, sound, or absent. */
import { channelNames, type ChannelHealth, type ChannelName } from '../../../shared/contract/logs.ts'
import { storedUnit } from './convert.ts'
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

/** A thermistor circuit that is open or shorted reads the end of its range: common practice, no source. */
const openCircuit = (low: number, high: number): string | null =>
  low === high && low <= -35
    ? `Never moves from ${low} °C, which an open circuit reads. Look at its plug first.`
    : low === high && low >= 140
      ? `Never moves from ${low} °C, which a short circuit reads.`
      : null

function judge(channel: ChannelName, values: ArrayLike<number>, spread: Spread, facts: HealthFacts): Verdict {
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
  if (channel === 'time') return ['sound', `${facts.rateHz.toFixed(facts.rateHz < 5 ? 1 : 0)} rows a second.`]
  return ['sound', low === high ? `Steady at ${low.toPrecision(3)} throughout.` : 'Moves as it should.']
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
      const [state, remark] = judge(channel, values, spread, facts)
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
