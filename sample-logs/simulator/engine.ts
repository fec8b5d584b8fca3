/** An invented engine: its true volumetric efficiency, its fuel film, its exhaust and its sensors. */
import type { Grid } from '../../shared/grid.ts'

export interface SimulatedEngine {
  readonly displacementL: number
  readonly cylinders: number
  readonly idleRpm: number
  readonly revLimitRpm: number
  readonly ambientKpa: number
  /** Highest manifold pressure the driver can reach, kPa. */
  readonly topKpa: number
  /** True volumetric efficiency, %, referred to manifold conditions; smooth, and on no grid. */
  readonly trueVe: (rpm: number, mapKpa: number) => number
  /** Wall film: share that lands on the port wall, and its time constant, s. */
  readonly film: { readonly share: number; readonly tauS: number }
  /** Valve to sensor: constant part, s, and exhaust mass in the pipe, kg. */
  readonly transport: { readonly t0S: number; readonly massKg: number }
  readonly sensor: { readonly lagS: number; readonly low: number; readonly high: number }
  readonly injector: { readonly flowMgPerMs: number; readonly deadTimeMs: number }
  readonly stoichAfr: number
}

/**
 * A smooth surface: breathing peaks at `peakRpm`, falls to both sides, and falls with manifold pressure as trapped
 * residual grows (the ideal-cycle shape), with two ripples that no bilinear grid follows exactly.
 */
export function breathing(shape: {
  peak: number
  peakRpm: number
  width: number
  ripplePct: number
  topKpa: number
}): (rpm: number, mapKpa: number) => number {
  return (rpm, mapKpa) => {
    const speed = Math.exp(-(((rpm - shape.peakRpm) / shape.width) ** 2) / 2)
    const residual = 1.0 - 0.115 * (100 / Math.max(mapKpa, 18) - 1) ** 0.82
    const low = mapKpa < 100 ? residual : 1 + 0.0005 * (mapKpa - 100)
    const ripple = 1 + (shape.ripplePct / 100) * (Math.sin(rpm / 640) + 0.5 * Math.cos(rpm / 410 + mapKpa / 23))
    return shape.peak * (0.62 + 0.38 * speed) * low * ripple
  }
}

/** The true surface read off at a grid's nodes, %. */
export const trueTable = (engine: SimulatedEngine, grid: Grid): Float64Array =>
  Float64Array.from({ length: grid.rpm.length * grid.mapKpa.length }, (_, i) =>
    engine.trueVe(grid.rpm[i % grid.rpm.length]!, grid.mapKpa[Math.floor(i / grid.rpm.length)]!),
  )
