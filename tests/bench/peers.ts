/**
 * Peers: the recursive estimators of the literature, written here from the published idea (recursive least squares on the
 * active cells of a linear look-up table; a Kalman filter with full covariance), not from anybody's code. They are given
 * the true delay, which the learner has to find.
 */
import { cornerAt, valueAt } from '../../shared/grid.ts'
import type { Drive } from '../../server/core/drive.ts'
import { roleOf } from '../../server/core/evidence/masks.ts'
import { prepare } from '../../server/core/model/prepare.ts'
import { totalDelayS } from '../../server/core/model/path.ts'
import type { Plant } from './scenarios.ts'

interface Reading {
  readonly cells: readonly number[]
  readonly weights: readonly number[]
  /** ln of the VE that would explain it. */
  readonly lnVe: number
}

function* readings(drive: Drive, plant: Plant): Generator<Reading> {
  const { engine, grid } = plant
  const prepared = prepare(drive, plant.facts, grid)
  const path = {
    t0S: engine.transport.t0S,
    massKg: engine.transport.massKg,
    lagS: engine.sensor.lagS,
    filmShare: 0,
    filmTauS: 1,
  }
  let from = 0
  for (let i = 0; i < prepared.n; i += 1) {
    if (!roleOf(prepared.mask[i]!).isUsed) continue
    const flow = prepared.airPerVe[i]! * valueAt(grid, drive.flashed.ve, drive.rpm[i]!, drive.mapKpa[i]!)
    const burnt = drive.timeS[i]! - totalDelayS(path, flow)
    while (from > 0 && drive.timeS[from]! > burnt) from -= 1
    while (from + 1 < i && drive.timeS[from + 1]! <= burnt) from += 1
    if (prepared.sinceCutS[from]! < 0.6 || prepared.asked[from] === 0) continue
    const { cells, weights } = cornerAt(grid, drive.rpm[from]!, drive.mapKpa[from]!)
    yield { cells, weights, lnVe: Math.log(prepared.asked[from]!) + prepared.lnLambda[i]! }
  }
}

/**
 * Kalman filter, full covariance: 25 % doubt at the start, readings taken as 80 % noise, since the residual is not white.
 * 80 % did best of 20, 45, 80, 150 and 300 on five drives that are not measured here.
 */
export function kalman(drive: Drive, plant: Plant): Float64Array {
  const x = plant.start.map(Math.log)
  const n = x.length
  const p = new Float64Array(n * n)
  for (let i = 0; i < n; i += 1) p[i * n + i] = 0.25 ** 2
  const noise = 0.8 ** 2
  const ph = new Float64Array(n)
  for (const { cells, weights, lnVe } of readings(drive, plant)) {
    let s = noise
    let miss = lnVe
    ph.fill(0)
    cells.forEach((cell, k) => {
      for (let i = 0; i < n; i += 1) ph[i]! += weights[k]! * p[cell * n + i]!
      miss -= weights[k]! * x[cell]!
    })
    cells.forEach((cell, k) => (s += weights[k]! * ph[cell]!))
    for (let i = 0; i < n; i += 1) {
      const gain = ph[i]! / s
      if (gain === 0) continue
      x[i]! += gain * miss
      for (let j = 0; j < n; j += 1) p[i * n + j]! -= gain * ph[j]!
    }
  }
  return x.map(Math.exp)
}

/** Recursive least squares on the four active cells, their covariance kept diagonal, forgetting 0.1 % a reading. */
export function recursiveLeastSquares(drive: Drive, plant: Plant): Float64Array {
  const x = plant.start.map(Math.log)
  const p = new Float64Array(x.length).fill(1)
  const forgetting = 0.999
  const noise = 40
  for (const { cells, weights, lnVe } of readings(drive, plant)) {
    const s = noise + weights.reduce((sum, weight, k) => sum + weight * weight * p[cells[k]!]!, 0)
    const miss = lnVe - cells.reduce((sum, cell, k) => sum + weights[k]! * x[cell]!, 0)
    cells.forEach((cell, k) => {
      const gain = (p[cell]! * weights[k]!) / s
      x[cell]! += gain * miss
      if (weights[k]! > 0) p[cell] = Math.min(1, (p[cell]! * (1 - gain * weights[k]!)) / forgetting)
    })
  }
  return x.map(Math.exp)
}
