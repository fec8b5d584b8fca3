/** What can be measured of a channel without knowing what it is: stillness, steps, noise, and how often it is really read. */

const median = (values: readonly number[]): number =>
  [...values].sort((a, b) => a - b)[Math.floor(values.length / 2)] ?? Number.NaN

/** Longest run of one and the same reading, s. */
export function longestStillS(values: ArrayLike<number>, timeS: ArrayLike<number>): number {
  let longest = 0
  for (let i = 1, start = 0; i < Math.min(values.length, timeS.length); i += 1) {
    if (values[i] !== values[start]) start = i
    longest = Math.max(longest, timeS[i]! - timeS[start]!)
  }
  return longest
}

/** Smallest step between neighbouring readings; NaN where nothing moves. */
export function stepOf(values: ArrayLike<number>): number {
  let least = Infinity
  for (let i = 1; i < values.length; i += 1) {
    const step = Math.abs(values[i]! - values[i - 1]!)
    // Smaller than this is the rounding of 32-bit storage.
    if (step > 1e-5 * Math.max(1, Math.abs(values[i]!)) && step < least) least = step
  }
  return Number.isFinite(least) ? least : Number.NaN
}

/**
 * Noise as a standard deviation, in the channel's unit: the median size of the second difference, which a smooth change
 * leaves at zero. A normal deviate's median size is 0.6745 of its standard deviation; second differences carry 6 variances.
 */
export function noiseOf(values: ArrayLike<number>): number {
  const bends: number[] = []
  for (let i = 1; i + 1 < values.length; i += 1) {
    const bend = Math.abs(values[i - 1]! - 2 * values[i]! + values[i + 1]!)
    if (Number.isFinite(bend)) bends.push(bend)
  }
  return median(bends) / 0.6745 / Math.sqrt(6)
}

export interface Rhythm {
  /** Median time between rows, s. */
  readonly rowS: number
  /** Time between rows in which engine speed or manifold pressure is new, s. */
  readonly readingS: number
  /** Pauses of more than five rows and half a second. */
  readonly gaps: number
  readonly longestGapS: number
}

/** How often rows come, and how often they say something new. */
export function rhythmOf(timeS: ArrayLike<number>, rpm: ArrayLike<number>, map: ArrayLike<number>): Rhythm {
  const steps: number[] = []
  let fresh = 0
  for (let i = 1; i < timeS.length; i += 1) {
    steps.push(timeS[i]! - timeS[i - 1]!)
    if (rpm[i] !== rpm[i - 1] || map[i] !== map[i - 1]) fresh += 1
  }
  const rowS = median(steps)
  const pauses = steps.filter((step) => step > Math.max(5 * rowS, 0.5))
  return {
    rowS,
    readingS: fresh > 0 ? (rowS * steps.length) / fresh : Infinity,
    gaps: pauses.length,
    longestGapS: pauses.reduce((most, step) => Math.max(most, step), 0),
  }
}
