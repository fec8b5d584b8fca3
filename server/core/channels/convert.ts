/** From a column's own unit to the unit a channel is stored in. */
import type { ChannelName } from '../../../shared/contract/logs.ts'

export const storedUnit: Readonly<Record<ChannelName, string>> = {
  time: 's',
  rpm: '1/min',
  map: 'kPa',
  lambda: 'lambda',
  targetLambda: 'lambda',
  ect: '°C',
  iat: '°C',
  tp: '%',
  trim: '%',
  warmup: '%',
  afterStart: '%',
  accel: '%',
  pulseWidth: 'ms',
  battery: 'V',
  baro: 'kPa',
}

type Conversion = (value: number) => number
const same: Conversion = (value) => value
const scaled =
  (factor: number): Conversion =>
  (value) =>
    value * factor

/** 1 lbf/in² and 1 inHg in kPa: NIST SP 811, appendix B (from memory). */
const pressure: Record<string, Conversion> = {
  kpa: same,
  kpaabs: same,
  pa: scaled(0.001),
  bar: scaled(100),
  mbar: scaled(0.1),
  hpa: scaled(0.1),
  psi: scaled(6.894757293168),
  psia: scaled(6.894757293168),
  inhg: scaled(3.386389),
}
const temperature: Record<string, Conversion> = {
  c: same,
  degc: same,
  celsius: same,
  f: (value) => (value - 32) / 1.8,
  degf: (value) => (value - 32) / 1.8,
  fahrenheit: (value) => (value - 32) / 1.8,
  k: (value) => value - 273.15,
}
const percent: Record<string, Conversion> = {
  '%': same,
  percent: same,
  pct: same,
  fraction: scaled(100),
  factor: (value) => (value - 1) * 100,
}

const units: Readonly<Record<ChannelName, Record<string, Conversion>>> = {
  time: { s: same, sec: same, seconds: same, ms: scaled(0.001), min: scaled(60), us: scaled(1e-6) },
  rpm: { rpm: same, '1/min': same, 'min-1': same, umin: same, 'u/min': same },
  map: pressure,
  baro: pressure,
  lambda: { lambda: same, λ: same, phi: (value) => 1 / value },
  targetLambda: { lambda: same, λ: same, phi: (value) => 1 / value },
  ect: temperature,
  iat: temperature,
  tp: { '%': same, percent: same, fraction: scaled(100) },
  trim: percent,
  warmup: percent,
  afterStart: percent,
  accel: percent,
  pulseWidth: { ms: same, us: scaled(0.001), s: scaled(1000) },
  battery: { v: same, mv: scaled(0.001) },
}

const fold = (unit: string): string =>
  unit
    .toLowerCase()
    .replace(/[\s°º.()[\]]/g, '')
    .replace(/kpa(a|abs)$/, 'kpa')

/** Units a channel can be given in, for the page that asks. */
export const unitsOf = (channel: ChannelName): string[] =>
  channel === 'lambda' || channel === 'targetLambda' ? ['lambda', 'AFR', 'phi'] : Object.keys(units[channel])

/**
 * The conversion for a unit, or null where the channel knows no such unit.
 * @param stoichAfr  of the fuel the AFR was computed with.
 */
export function conversion(channel: ChannelName, unit: string, stoichAfr: number): Conversion | null {
  const folded = fold(unit)
  if ((channel === 'lambda' || channel === 'targetLambda') && /^(afr|:1|airfuelratio|toone)$/.test(folded))
    return scaled(1 / stoichAfr)
  return units[channel][folded] ?? null
}

/** What a unit must be when none is written, by the size of the numbers. Null: ask. */
export function guessUnit(channel: ChannelName, median: number, low: number, high: number): string | null {
  switch (channel) {
    case 'time':
      return null
    case 'rpm':
      return 'rpm'
    case 'map':
    case 'baro':
      if (low < 0) return null
      return high > 400 ? 'mbar' : high > 40 ? 'kPa' : high > 16 ? null : high > 4 ? 'psi' : 'bar'
    case 'lambda':
    case 'targetLambda':
      return median > 5 ? 'AFR' : 'lambda'
    case 'ect':
    case 'iat':
      return high > 250 ? 'K' : high > 135 ? 'F' : 'C'
    case 'tp':
      return high <= 1.2 ? 'fraction' : '%'
    case 'trim':
    case 'warmup':
    case 'afterStart':
    case 'accel':
      return low > 0.5 && high < 3 ? 'factor' : low > 50 ? null : '%'
    case 'pulseWidth':
      return high > 200 ? 'us' : 'ms'
    case 'battery':
      return high > 100 ? 'mV' : 'V'
  }
}
