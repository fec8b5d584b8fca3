/** A drive made ready for the forward model: everything that depends neither on the table sought nor on the path. */
import { cellCount, cornerAt, valueAt, type Grid } from '../../../shared/grid.ts'
import type { Drive, EngineFacts } from '../drive.ts'
import { maskDrive, roleOf, stepS } from '../evidence/masks.ts'
import { airPerVe } from './airflow.ts'

/** All arrays are n long but for `cells` and `weights`, 4 n: sample i stands on cells[4i..4i+3]. */
export interface Prepared {
  readonly n: number
  readonly cellCount: number
  readonly timeS: Float64Array
  /** Time since the sample before, s; 0 where the log starts afresh. */
  readonly dtS: Float64Array
  /** Seconds the sample stands for. */
  readonly seconds: Float64Array
  readonly cells: Int32Array
  /** Bilinear, dimensionless, sum 1 for each sample. */
  readonly weights: Float64Array
  /**
   * Fuel asked for: flashed VE times corrections over target lambda, %. It is the VE at which that fuel burns at lambda 1;
   * 0 while fuel is cut.
   */
  readonly asked: Float64Array
  /** Air mass flow for each % of VE, kg/s. */
  readonly airPerVe: Float64Array
  /** ln of measured lambda; of the sensor's rich limit for a censored sample. */
  readonly lnLambda: Float64Array
  /** Index into `maskNames`. */
  readonly mask: Uint8Array
  /** 0 does not speak, 1 speaks, 2 says only "at most the rich limit". */
  readonly role: Uint8Array
  /** Seconds since fuel was last cut. */
  readonly sinceCutS: Float64Array
  /** Extra standard deviation for the warm-up multiplier, ln. */
  readonly warmSd: Float64Array
  readonly medianDtS: number
}

export const Role = { silent: 0, speaks: 1, censored: 2 } as const

const factorAt = (column: Float64Array | undefined, i: number): number => {
  const value = column?.[i]
  return value !== undefined && Number.isFinite(value) ? value : 1
}

/** Target lambda in force at a sample: as logged, else from the target table. */
export function targetAt(drive: Drive, i: number): number {
  const logged = drive.targetLambda?.[i]
  return logged !== undefined && logged > 0.4
    ? logged
    : valueAt(drive.target.grid, drive.target.lambda, drive.rpm[i]!, drive.mapKpa[i]!)
}

/** Product of the corrections that the log holds; 1 where it holds none. */
const correctionsAt = (drive: Drive, i: number): number =>
  factorAt(drive.trim, i) * factorAt(drive.warmup, i) * factorAt(drive.afterStart, i) * factorAt(drive.accel, i)

function medianOf(values: Float64Array): number {
  return values.length === 0 ? Number.NaN : values.toSorted()[values.length >> 1]!
}

const usualIntakeC = 30

/** Two readings further apart than this belong to different stretches: no film, no exhaust is carried over. */
const gapS = (medianDtS: number): number => Math.max(1, 5 * medianDtS)

/** O(samples). A blank rpm or pressure holds the last reading for the sake of film and exhaust; it never speaks. */
export function prepare(drive: Drive, engine: EngineFacts, grid: Grid): Prepared {
  const n = drive.timeS.length
  const timeS = drive.timeS
  const steps = new Float64Array(Math.max(0, n - 1))
  for (let i = 1; i < n; i += 1) steps[i - 1] = timeS[i]! - timeS[i - 1]!
  const medianDtS = Math.max(1e-3, medianOf(steps.filter((step) => step > 0)) || 0.1)
  const mask = maskDrive(drive, engine, grid, medianDtS)
  const out = {
    n,
    cellCount: cellCount(grid),
    timeS,
    dtS: new Float64Array(n),
    seconds: new Float64Array(n),
    cells: new Int32Array(4 * n),
    weights: new Float64Array(4 * n),
    asked: new Float64Array(n),
    airPerVe: new Float64Array(n),
    lnLambda: new Float64Array(n),
    mask,
    role: new Uint8Array(n),
    sinceCutS: new Float64Array(n),
    warmSd: new Float64Array(n),
    medianDtS,
  }
  const richLimit = engine.lambdaRange.low
  let rpm = 0
  let map = 0
  let intakeC = usualIntakeC
  let cutAt = -Infinity
  for (let i = 0; i < n; i += 1) {
    const step = i > 0 ? timeS[i]! - timeS[i - 1]! : 0
    out.dtS[i] = step > 0 && step <= gapS(medianDtS) ? step : 0
    out.seconds[i] = stepS(timeS, i)
    if (Number.isFinite(drive.rpm[i])) rpm = Math.max(50, drive.rpm[i]!)
    if (Number.isFinite(drive.mapKpa[i])) map = Math.max(5, drive.mapKpa[i]!)
    if (drive.iatC && Number.isFinite(drive.iatC[i])) intakeC = drive.iatC[i]!
    const { cells, weights } = cornerAt(grid, rpm, map)
    out.cells.set(cells, 4 * i)
    out.weights.set(weights, 4 * i)
    out.airPerVe[i] = airPerVe(map, engine.displacementL, rpm, intakeC)
    const role = roleOf(mask[i]!)
    if (role.isCut) cutAt = timeS[i]!
    out.sinceCutS[i] = timeS[i]! - cutAt
    out.asked[i] = role.isCut
      ? 0
      : (correctionsAt(drive, i) / targetAt(drive, i)) * valueAt(drive.flashed.grid, drive.flashed.ve, rpm, map)
    if (!Number.isFinite(out.asked[i]))
      out.asked[i] = i > 0 ? out.asked[i - 1]! : valueAt(grid, drive.flashed.ve, rpm, map)
    out.role[i] = role.isCensored ? Role.censored : role.isUsed ? Role.speaks : Role.silent
    out.lnLambda[i] = Math.log(role.isCensored ? richLimit : drive.lambda[i]!)
    const ect = drive.ectC?.[i]
    if (ect !== undefined && ect < 80) out.warmSd[i] = 0.03 * Math.min(2, (80 - ect) / 20)
  }
  return out
}
