/** What happens to the mixture between injector and reading, one stage each: values in, one step at a time, values out. */
import type { Random } from './random.ts'

/**
 * Fuel film on the port wall (the X-tau model, Aquino, SAE 810494): a share of the flow lands there, the film gives it
 * back with its time constant.
 * @returns fuel flow injected to fuel flow into the cylinder, same unit; the film is dry at first.
 */
export function filmOnWall({ share, tauS }: { share: number; tauS: number }, stepS: number): (flow: number) => number {
  const keep = Math.exp(-stepS / tauS)
  let film = 0
  return (flow) => {
    film = keep * film + (1 - keep) * share * flow
    return (1 - share) * flow + film
  }
}

/**
 * Plug flow from valve to sensor: what arrives left the valve when as much mass less as the pipe holds had gone through,
 * counted from `t0S` ago. At constant flow a delay of t0S + massKg / flow.
 * @returns equivalence ratio at the valve and mass flow, kg/s, to equivalence ratio at the sensor.
 */
export function pipe(
  { t0S, massKg }: { t0S: number; massKg: number },
  stepS: number,
): (phi: number, flowKgS: number) => number {
  const delaySteps = Math.round(t0S / stepS)
  const gone: number[] = []
  const phis: number[] = []
  let mass = 0
  let pointer = 0
  return (phi, flowKgS) => {
    mass += flowKgS * stepS
    gone.push(mass)
    phis.push(phi)
    const n = phis.length - 1
    const wanted = gone[Math.max(0, n - delaySteps)]! - massKg
    while (pointer + 1 < n && gone[pointer + 1]! <= wanted) pointer += 1
    const next = Math.min(pointer + 1, n)
    const span = gone[next]! - gone[pointer]!
    const share = span > 0 ? Math.min(1, Math.max(0, (wanted - gone[pointer]!) / span)) : 0
    return phis[pointer]! + share * (phis[next]! - phis[pointer]!)
  }
}

/** A sensor that answers a step by 1 − exp(−t / lag); without lag, at once. */
export function firstOrder(lagS: number, stepS: number, start: number): (value: number) => number {
  const gain = 1 - Math.exp(-stepS / lagS)
  let shown = start
  return (value) => {
    shown += gain * (value - shown)
    return shown
  }
}

/** A value that wanders around 0 with standard deviation `sd` and memory `tauS` (Ornstein-Uhlenbeck). */
export function wander({ sd, tauS }: { sd: number; tauS: number }, stepS: number, random: Random): () => number {
  let value = 0
  return () => {
    value += -value * (stepS / tauS) + sd * Math.sqrt((2 * stepS) / tauS) * random.normal()
    return value
  }
}

/** Spells in which a sensor says nothing and its column reads 0: on average `perMinute`, 0.2 to 1.2 s long. */
export function dropouts(perMinute: number, stepS: number, random: Random): () => boolean {
  let left = 0
  return () => {
    left -= stepS
    if (left <= 0 && random.even() < (perMinute / 60) * stepS) left = 0.2 + random.even()
    return left > 0
  }
}
