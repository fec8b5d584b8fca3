/** The time, as an argument. */
export interface Clock {
  now(): Date
}
export const systemClock: Clock = { now: () => new Date() }
