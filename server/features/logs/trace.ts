/** Lowest and highest readings in equal stretches of time, so that a plot of any length shows every spike. */
import type { Numbers } from '../../../shared/wire.ts'

export interface Buckets {
  readonly timeS: number[]
  readonly low: Numbers
  readonly high: Numbers
}

/** @param points  how many stretches at most. Stretches without a reading are null. */
export function traceOf(
  time: Float64Array,
  values: Float64Array,
  points: number,
  fromS?: number,
  toS?: number,
): Buckets {
  const from = fromS ?? time[0] ?? 0
  const to = Math.max(toS ?? time.at(-1) ?? 0, from + 1e-9)
  const inside = time.reduce((count, t) => count + (t >= from && t <= to ? 1 : 0), 0)
  const count = Math.max(1, Math.min(points, inside))
  const width = (to - from) / count
  const low = new Float64Array(count).fill(Infinity)
  const high = new Float64Array(count).fill(-Infinity)
  for (let i = 0; i < time.length; i += 1) {
    const t = time[i]!
    const value = values[i]!
    if (t < from || t > to || !Number.isFinite(value)) continue
    const bucket = Math.min(count - 1, Math.floor((t - from) / width))
    if (value < low[bucket]!) low[bucket] = value
    if (value > high[bucket]!) high[bucket] = value
  }
  const finite = (value: number): number | null => (Number.isFinite(value) ? Number(value.toPrecision(6)) : null)
  return {
    timeS: Array.from({ length: count }, (_, i) => Number((from + i * width).toFixed(3))),
    low: Array.from(low, finite),
    high: Array.from(high, finite),
  }
}
