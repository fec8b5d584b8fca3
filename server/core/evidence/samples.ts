/** From a drive to observations of the VE surface: what VE would explain each lambda reading, and where it speaks. */
import { cornerAt, valueAt, type Grid } from '../../../shared/grid.ts'
import type { Drive, EngineFacts } from '../drive.ts'
import { isUsed, maskDrive, stepS, totalsOf, type MaskTotals } from './masks.ts'

/** Observations of ln VE, flat: sample i touches cells[4i..4i+3] with weights[4i..4i+3]. */
export interface Observations {
  readonly count: number
  readonly cells: Int32Array
  /** Bilinear, dimensionless, sum 1 for each sample. */
  readonly weights: Float64Array
  /** ln of the VE (in %) that would explain the reading. */
  readonly lnVe: Float64Array
  /** Seconds the sample stands for. */
  readonly seconds: Float64Array
  /** Time in the drive, s. */
  readonly timeS: Float64Array
  readonly masks: MaskTotals
}

export interface DelayModel {
  /** Constant part, s. */
  readonly t0S: number
  /** Exhaust mass between valve and sensor, kg: transport time is kKg over mass flow. */
  readonly kKg: number
  /** First-order lag of the sensor, s; treated as a delay here. */
  readonly lagS: number
}

/** Middle of the ranges the estimator's page gives. */
export const usualDelay: DelayModel = { t0S: 0.08, kKg: 1.0e-3, lagS: 0.09 }

const gasConstantAir = 287.05

/** Air mass flow by the ideal gas law, kg/s. @param vePct VE in %. */
export function airFlowKgS(vePct: number, mapKpa: number, displacementL: number, rpm: number, intakeC: number): number {
  return ((vePct / 100) * mapKpa * displacementL * (rpm / 120)) / (gasConstantAir * (intakeC + 273.15))
}

export const totalDelayS = (delay: DelayModel, flowKgS: number): number =>
  delay.t0S + delay.lagS + Math.min(1, delay.kKg / Math.max(flowKgS, 1e-4))

/** Fuel the controller asked for, as equivalence ratio, if its table were right: corrections over target lambda. */
export function commandedPhi(drive: Drive, i: number): number {
  const factor = (column: Float64Array | undefined) => {
    const value = column?.[i]
    return value !== undefined && Number.isFinite(value) ? value : 1
  }
  const logged = drive.targetLambda?.[i]
  const target =
    logged !== undefined && Number.isFinite(logged) && logged > 0.4
      ? logged
      : valueAt(drive.target.grid, drive.target.lambda, drive.rpm[i]!, drive.mapKpa[i]!)
  return (factor(drive.trim) * factor(drive.warmup) * factor(drive.afterStart) * factor(drive.accel)) / target
}

/**
 * Turns a drive into observations on `grid`. A reading at time t speaks of the mixture burnt a transport delay earlier,
 * so position, table and corrections are taken there. O(samples).
 */
export function observe(drive: Drive, engine: EngineFacts, grid: Grid, delay: DelayModel): Observations {
  const n = drive.timeS.length
  const masks = maskDrive(drive, engine, grid)
  const cells = new Int32Array(4 * n)
  const weights = new Float64Array(4 * n)
  const lnVe = new Float64Array(n)
  const seconds = new Float64Array(n)
  const timeS = new Float64Array(n)
  let count = 0
  let source = 0
  for (let i = 0; i < n; i += 1) {
    if (!isUsed(masks[i]!)) continue
    const flow = airFlowKgS(
      valueAt(drive.flashed.grid, drive.flashed.ve, drive.rpm[i]!, drive.mapKpa[i]!),
      drive.mapKpa[i]!,
      engine.displacementL,
      drive.rpm[i]!,
      drive.iatC?.[i] ?? 30,
    )
    const from = drive.timeS[i]! - totalDelayS(delay, flow)
    source = Math.min(source, i)
    while (source > 0 && drive.timeS[source]! > from) source -= 1
    while (source + 1 < i && drive.timeS[source + 1]! <= from) source += 1
    if (!isUsed(masks[source]!) || drive.timeS[i]! - drive.timeS[source]! > 3) continue
    const { cells: four, weights: share } = cornerAt(grid, drive.rpm[source]!, drive.mapKpa[source]!)
    const flashed = valueAt(drive.flashed.grid, drive.flashed.ve, drive.rpm[source]!, drive.mapKpa[source]!)
    cells.set(four, 4 * count)
    weights.set(share, 4 * count)
    lnVe[count] = Math.log(commandedPhi(drive, source) * flashed * drive.lambda[i]!)
    seconds[count] = stepS(drive.timeS, i)
    timeS[count] = drive.timeS[i]!
    count += 1
  }
  return { count, cells, weights, lnVe, seconds, timeS, masks: totalsOf(drive.timeS, masks) }
}

/** Useful seconds in each cell: the sum of squared weights times the sample's time. */
export function evidenceSeconds(observations: readonly Observations[], n: number): Float64Array {
  const evidence = new Float64Array(n)
  for (const each of observations) {
    for (let i = 0; i < 4 * each.count; i += 1)
      evidence[each.cells[i]!]! += each.weights[i]! ** 2 * each.seconds[i >> 2]!
  }
  return evidence
}
