/** When a log cannot teach at all: the reason, in words a person can act on. */
import type { Drive } from '../drive.ts'
import type { MaskTotals } from './masks.ts'

export interface LearnRefusal {
  readonly ok: false
  readonly reason: 'flat-channel' | 'swapped' | 'too-short' | 'no-overlap' | 'pegged' | 'not-solvable'
  readonly detail: string
  readonly driveId?: string
}

function span(values: Float64Array): { low: number; high: number } {
  let low = Infinity
  let high = -Infinity
  for (const value of values) {
    if (value < low) low = value
    if (value > high) high = value
  }
  return { low, high }
}

const leastUsedS = 20

/** Null where the log can be learned from. */
export function refusalOf(drive: Drive, totals: MaskTotals): LearnRefusal | null {
  const refuse = (reason: LearnRefusal['reason'], detail: string): LearnRefusal => ({
    ok: false,
    reason,
    detail,
    driveId: drive.id,
  })
  const rpm = span(drive.rpm)
  const map = span(drive.mapKpa)
  const lambda = span(drive.lambda)
  if (map.high > 600 && rpm.high < 400) {
    return refuse('swapped', 'Engine speed and manifold pressure seem to be swapped: correct the mapping of the log.')
  }
  const flat = (channel: { low: number; high: number }, words: string) =>
    channel.high - channel.low < 1e-6 || !Number.isFinite(channel.high)
      ? refuse(
          'flat-channel',
          `${words} never moves in this log: mend the sensor or correct the mapping, then drive again.`,
        )
      : null
  const dead = flat(rpm, 'Engine speed') ?? flat(map, 'Manifold pressure') ?? flat(lambda, 'Lambda')
  if (dead) return dead
  const { usedS, totalS, leftOutS } = totals
  if (usedS >= leastUsedS) return null
  const worst = Object.entries(leftOutS).sort((a, b) => b[1] - a[1])[0]
  if (worst?.[0] === 'outside the table') {
    return refuse(
      'no-overlap',
      'The engine ran outside the axes of the table nearly all the time: check the unit of manifold pressure, or widen the axes.',
    )
  }
  if (
    worst?.[0] === 'sensor at a limit' ||
    worst?.[0] === 'richer than the sensor reads' ||
    worst?.[0] === 'sensor frozen'
  ) {
    return refuse(
      'pegged',
      'Lambda stands at the end of the sensor’s range nearly all the time: it cannot say how far off the table is.',
    )
  }
  return refuse(
    'too-short',
    `Only ${usedS.toFixed(0)} of ${totalS.toFixed(0)} seconds can be learned from${worst ? `; most was left out as “${worst[0]}”` : ''}. At least ${leastUsedS} are needed.`,
  )
}
