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

/** Pressure of the standard atmosphere, which gauge readings are taken from: ISO 2533 / US Standard Atmosphere 1976. */
export const standardAtmosphereKpa = 101.325

/** Conventional millimetre and inch of mercury and lbf/in² in kPa: NIST SP 811, appendix B (from memory). */
const inKpa: Readonly<Record<string, number>> = {
  kpa: 1,
  pa: 0.001,
  bar: 100,
  mbar: 0.1,
  hpa: 0.1,
  psi: 6.894757293168,
  inhg: 3.386389,
  mmhg: 0.1333224,
}
const celsius = (name: string): Conversion | null =>
  /^(deg|grad)?c(elsius)?$/.test(name)
    ? same
    : /^(deg|grad)?f(ahrenheit)?$/.test(name)
      ? (value) => (value - 32) / 1.8
      : /^(deg)?k(elvin)?$/.test(name)
        ? (value) => value - 273.15
        : null

/** Absolute unless the unit says gauge: then the air outside is added. */
function pressure(name: string, outsideKpa: number): Conversion | null {
  const { gauge, base } = splitGauge(name)
  const factor = inKpa[base]
  return factor === undefined ? null : gauge ? (value) => value * factor + outsideKpa : scaled(factor)
}

/** "psig", "kpa gauge", "bar rel" and "psia", "kpa abs", folded. */
function splitGauge(name: string): { gauge: boolean; base: string } {
  const gauge = /^(kpa|bar|mbar|hpa|psi|inhg)(g|gauge|rel|relative)$/.exec(name)
  const absolute = /^(kpa|bar|mbar|hpa|psi|inhg)(a|abs|absolute)$/.exec(name)
  return { gauge: gauge !== null, base: gauge?.[1] ?? absolute?.[1] ?? name }
}

const percent: Readonly<Record<string, Conversion>> = {
  '%': same,
  percent: same,
  pct: same,
  fraction: scaled(100),
  factor: (value) => (value - 1) * 100,
  '%100=none': (value) => value - 100,
}
/** A correction in percent of the base amount, so that 100 says "none". */
export const percentOfBase = '% (100 = none)'
const lambdaUnits: Readonly<Record<string, Conversion>> = { '': same, lambda: same, λ: same, phi: (value) => 1 / value }
const milliseconds = ['ms', 'msec', 'millisec', 'milliseconds']
const microseconds = ['us', 'µs', 'μs', 'usec']
const listed = (names: readonly string[], conversion: Conversion): Record<string, Conversion> =>
  Object.fromEntries(names.map((name) => [name, conversion]))

const units: Partial<Readonly<Record<ChannelName, Readonly<Record<string, Conversion>>>>> = {
  time: {
    ...listed(['s', 'sec', 'secs', 'second', 'seconds', 'hms', 'hhmmss', 'hhmmsss', 'hhmmssms', 'hhmm'], same),
    ...listed(milliseconds, scaled(0.001)),
    ...listed(microseconds, scaled(1e-6)),
    min: scaled(60),
    h: scaled(3600),
  },
  rpm: listed(
    ['', 'rpm', '1/min', 'min-1', 'min^-1', 'rev/min', 'r/min', 'u/min', 'umin', 'umdr/min', 'tr/min', 'trs/min'],
    same,
  ),
  lambda: lambdaUnits,
  targetLambda: lambdaUnits,
  tp: { '%': same, percent: same, pct: same, fraction: scaled(100) },
  trim: percent,
  warmup: percent,
  afterStart: percent,
  accel: percent,
  pulseWidth: {
    ...listed(milliseconds, same),
    ...listed(microseconds, scaled(0.001)),
    s: scaled(1000),
  },
  battery: { v: same, volt: same, volts: same, mv: scaled(0.001) },
}

const fold = (unit: string): string => unit.toLowerCase().replace(/[\s°º.:()[\]]/g, '')

/** What a column writes where it has no unit. */
export const saysNoUnit = (unit: string): boolean =>
  /^[\s()[\]\-–—_.]*(1|none|n\/?a|unitless|dimensionless)?[\s()[\]\-–—_.]*$/i.test(unit)

export const isGauge = (unit: string): boolean => splitGauge(fold(unit)).gauge
export const isAirFuelRatio = (unit: string): boolean =>
  /^(afr|:1|a\/f|airfuelratio|toone)$/i.test(unit.replace(/[\s()[\]]/g, ''))

/**
 * The conversion for a unit, or null where the channel knows no such unit.
 * @param stoichAfr   of the fuel the AFR was computed with.
 * @param outsideKpa  what gauge pressures are measured from.
 */
export function conversion(
  channel: ChannelName,
  unit: string,
  stoichAfr: number,
  outsideKpa: number = standardAtmosphereKpa,
): Conversion | null {
  if ((channel === 'lambda' || channel === 'targetLambda') && isAirFuelRatio(unit)) return scaled(1 / stoichAfr)
  const folded = saysNoUnit(unit) ? '' : fold(unit)
  if (channel === 'map' || channel === 'baro') return pressure(folded, outsideKpa)
  if (channel === 'ect' || channel === 'iat') return celsius(folded)
  return units[channel]?.[folded] ?? null
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
      return median > 5 && median < 40 ? 'AFR' : median > 0.6 && median < 1.6 ? 'lambda' : null
    case 'ect':
    case 'iat':
      return high > 250 ? 'K' : high > 135 ? 'F' : 'C'
    case 'tp':
      return high <= 1.2 ? 'fraction' : '%'
    case 'trim':
    case 'warmup':
    case 'afterStart':
    case 'accel':
      return guessCorrection(low, median, high)
    case 'pulseWidth':
      return high > 200 ? 'us' : 'ms'
    case 'battery':
      return high > 100 ? 'mV' : 'V'
  }
}

/** A factor is 1 where it corrects nothing, a percentage 0 or 100; a column that never comes by leaves it open. */
function guessCorrection(low: number, median: number, high: number): string | null {
  if (low > 0.5 && high < 3) return low <= 1 && high >= 1 && median < 1.5 ? 'factor' : null
  if (low < 50) return '%'
  return low <= 105 && high >= 95 ? percentOfBase : null
}
