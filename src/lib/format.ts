/** Numbers, dates and durations as the pages write them: thin space, true minus, figures to the place that is known. */

const thin = '\u202f'
const minus = '\u2212'

/** 37440.25 -> "37 440.3" with one digit; "none" for no number. */
export function formatNumber(value: number, digits = 0): string {
  if (!Number.isFinite(value)) return 'none'
  const [whole = '0', part] = Math.abs(value).toFixed(digits).split('.')
  // Four figures stay together: 5600, but 37 440.
  const grouped = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, thin) : whole
  const isZero = Number(Math.abs(value).toFixed(digits)) === 0
  return `${value < 0 && !isZero ? minus : ''}${grouped}${part ? `.${part}` : ''}`
}

/** With its sign, also when positive; zero has none. */
export function formatSigned(value: number, digits = 0): string {
  const text = formatNumber(value, digits)
  return value > 0 && Number(value.toFixed(digits)) !== 0 ? `+${text}` : text
}

const day = new Intl.DateTimeFormat('en-GB', { day: 'numeric', month: 'short' })
const dayYear = new Intl.DateTimeFormat('en-GB', { day: 'numeric', month: 'long', year: 'numeric' })
const dayTime = new Intl.DateTimeFormat('en-GB', {
  day: 'numeric',
  month: 'long',
  year: 'numeric',
  hour: '2-digit',
  minute: '2-digit',
})

export const formatDate = (iso: string): string => day.format(new Date(iso))
export const formatLongDate = (iso: string): string => dayYear.format(new Date(iso))
export const formatDateTime = (iso: string): string => dayTime.format(new Date(iso))

/** 754 -> "12:34", as places on a trace are named. */
export function formatClock(seconds: number): string {
  const whole = Math.max(0, Math.round(seconds))
  return `${Math.floor(whole / 60)}:${String(whole % 60).padStart(2, '0')}`
}

/** 83886080 -> "84 MB". */
export function formatBytes(bytes: number): string {
  if (bytes < 1000) return `${bytes} B`
  if (bytes < 1_000_000) return `${formatNumber(bytes / 1000)} kB`
  return `${formatNumber(bytes / 1_000_000, bytes < 10_000_000 ? 1 : 0)} MB`
}
