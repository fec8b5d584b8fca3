/** One field that is no plain number: blank, text, quoted, unit behind it, thousands marks, clock time, date. */

export const missing = /^(|-+|nan|n\/?a|null|none|[+-]?inf(inity)?|\?)$/i

const suffixed = /^([+-]?(?:\d+(?:\.\d*)?|\.\d+))\s*[^\d\s.,:;/\\+-][^\d]*$/
const clock = /^(\d+):(\d{1,2})(?::(\d{1,2}(?:\.\d+)?))?$/
const stamp = /^(\d{4})-(\d\d)-(\d\d)(?:[T ](\d\d):(\d\d)(?::(\d\d(?:\.\d+)?))?Z?)?$/
const pointThousands = /^[+-]?\d{1,3}(\.\d{3})+,\d+$/
const commaThousands = /^[+-]?\d{1,3}(,\d{3})+\.\d+$/

/** Takes one pair of quotes off, and what RFC 4180 doubles inside them. */
const unquoted = (field: string): string =>
  field.length > 1 && field.startsWith('"') && field.endsWith('"')
    ? field.slice(1, -1).replaceAll('""', '"').trim()
    : field

/** Both marks in one number leave no doubt which of them is the decimal mark; one alone is decided by the file. */
function withPoint(field: string, comma: boolean): string {
  if (pointThousands.test(field)) return field.replaceAll('.', '').replace(',', '.')
  if (commaThousands.test(field)) return field.replaceAll(',', '')
  return comma ? field.replace(',', '.') : field
}

/**
 * What `Number` makes of the field, and beyond that a number with its unit, a clock time or an ISO date in seconds.
 * @param comma  whether one comma may be the decimal mark.
 * @returns NaN where the field says nothing or is no number.
 */
export function slowNumber(text: string, comma: boolean): number {
  const field = withPoint(unquoted(text.trim()), comma)
  if (missing.test(field)) return Number.NaN
  const plain = /^[+-]?0[xob]/i.test(field) ? Number.NaN : Number(field)
  if (Number.isFinite(plain)) return plain
  const time = clock.exec(field)
  if (time) {
    const [first, second, third] = [Number(time[1]), Number(time[2]), time[3]]
    return third === undefined ? first * 60 + second : first * 3600 + second * 60 + Number(third)
  }
  const date = stamp.exec(field)
  if (date) {
    const [year, month, day, hour, minute, second] = date.slice(1).map((part) => Number(part ?? 0))
    return Date.UTC(year!, month! - 1, day) / 1000 + hour! * 3600 + minute! * 60 + second!
  }
  const unit = suffixed.exec(field)
  return unit ? Number(unit[1]) : Number.NaN
}

/** A field of the body that carries a number, for telling the body from what stands above it. */
export const isNumeric = (field: string): boolean => Number.isFinite(slowNumber(field, true))
