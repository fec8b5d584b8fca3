/** A driver: stretches of idle, pulling away, cruising, climbing and overrun, as engine speed and manifold pressure over time. */
import type { SimulatedEngine } from './engine.ts'
import type { Random } from './random.ts'

export interface Moment {
  readonly rpm: number
  readonly mapKpa: number
  readonly tpPct: number
  /** Foot off the pedal above idle speed: the controller may cut the fuel. */
  readonly overrun: boolean
}

export type Habit = 'yard' | 'road' | 'hills' | 'track'

interface Stretch {
  readonly seconds: number
  readonly rpm: number
  readonly mapKpa: number
  readonly kind: 'idle' | 'drive' | 'overrun'
}

const pick = (random: Random, low: number, high: number): number => low + (high - low) * random.even()

function nextStretch(engine: SimulatedEngine, habit: Habit, random: Random): Stretch {
  const draw = random.even()
  const idleShare = habit === 'yard' ? 0.6 : 0.12
  if (draw < idleShare)
    return { kind: 'idle', seconds: pick(random, 8, 25), rpm: engine.idleRpm, mapKpa: pick(random, 33, 40) }
  if (draw < idleShare + 0.13)
    return {
      kind: 'overrun',
      seconds: pick(random, 2, 6),
      rpm: pick(random, 1300, 0.5 * engine.revLimitRpm),
      mapKpa: pick(random, 24, 28),
    }
  const hard = habit === 'hills' ? 0.5 : habit === 'track' ? 0.65 : 0.2
  const full = random.even() < hard
  const top = habit === 'track' ? 0.95 : 0.72
  return {
    kind: 'drive',
    seconds: full ? pick(random, 4, 12) : pick(random, 5, 22),
    rpm: pick(random, 1100, (full ? top : 0.62) * engine.revLimitRpm),
    mapKpa: full ? pick(random, 0.75, 1) * engine.topKpa : pick(random, 32, 0.72 * Math.min(engine.topKpa, 105)),
  }
}

/**
 * Drives for a while: speed and pressure chase what each stretch asks for, with their own inertia, and never stand still.
 * @param hunting  amplitude of an idle that swings every 1.9 s, 1/min; 0 for a steady one.
 */
export function drive(
  engine: SimulatedEngine,
  habit: Habit,
  seconds: number,
  stepS: number,
  hunting: number,
  random: Random,
): Moment[] {
  const moments: Moment[] = []
  let rpm = engine.idleRpm
  let map = 38
  let stretch: Stretch = { kind: 'idle', seconds: 25, rpm: engine.idleRpm, mapKpa: 36 }
  let left = stretch.seconds
  let wander = 0
  for (let n = 0; n * stepS < seconds; n += 1) {
    if (left <= 0) {
      stretch = nextStretch(engine, habit, random)
      left = stretch.seconds
    }
    left -= stepS
    wander += -wander * (stepS / 1.5) + random.normal() * Math.sqrt(stepS)
    const swing = stretch.kind === 'idle' ? hunting * Math.sin((2 * Math.PI * n * stepS) / 1.9) : 0
    const inertiaS = stretch.kind === 'overrun' ? 1.6 : stretch.mapKpa > 70 ? 3.2 : 1.8
    rpm += (stretch.rpm + swing + 18 * wander - rpm) * Math.min(1, stepS / (stretch.kind === 'idle' ? 0.5 : inertiaS))
    map += (stretch.mapKpa - swing / 22 + 1.3 * wander - map) * Math.min(1, stepS / 0.22)
    const overrun = stretch.kind === 'overrun' && map < 30
    const tpPct =
      stretch.kind === 'drive'
        ? Math.max(1, (map / Math.min(engine.topKpa, 103)) ** 2.2 * 85 * Math.min(1.2, 0.4 + rpm / engine.revLimitRpm))
        : 0
    moments.push({ rpm, mapKpa: Math.max(20, map), tpPct: Math.min(100, tpPct), overrun })
  }
  return moments
}
