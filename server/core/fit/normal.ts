/** One log's sums: what its readings say of the cells, of the drift knots and of the two together. */
import { Role, type Prepared } from '../model/prepare.ts'
import { walkRows, type Burn, type Prediction } from '../model/forward.ts'
import type { MixturePath } from '../model/path.ts'

/** Times of the drift's knots; a linear hat stands on each. */
export interface Knots {
  readonly count: number
  readonly firstS: number
  readonly stepS: number
}

export function knotsFor(timeS: Float64Array, stepS: number): Knots {
  const first = timeS[0] ?? 0
  return { firstS: first, stepS, count: Math.max(2, Math.ceil(((timeS.at(-1) ?? 0) - first) / stepS) + 1) }
}

/** Lower knot and the share of the upper one at a time. */
export function knotAt(knots: Knots, timeS: number): { lower: number; share: number } {
  const at = (timeS - knots.firstS) / knots.stepS
  const lower = Math.min(knots.count - 2, Math.max(0, Math.floor(at)))
  return { lower, share: at - lower }
}

/**
 * Weighted sums over a log, with r a row of derivatives d ln lambda / d ln VE, y the residual and h the drift's hats:
 * what the normal equations of cells and drift are made of. n cells, k knots.
 */
export interface RawSums {
  readonly n: number
  readonly knots: Knots
  /** Σ w r rᵀ, n × n, row-major; only the lower triangle is filled. */
  readonly cells: Float64Array
  /** Σ w r y, n. */
  readonly pull: Float64Array
  /** Σ w h rᵀ, k × n, row-major. */
  readonly cross: Float64Array
  /** Σ w h hᵀ is tridiagonal: its diagonal, k, and what stands right of it, k. */
  readonly knotDiagonal: Float64Array
  readonly knotBeside: Float64Array
  /** Σ w h y, k. */
  readonly knotPull: Float64Array
}

/**
 * @param residual  measured minus predicted ln lambda, n samples; drift still in it.
 * @param weight    of each sample, 1 / variance; 0 where it does not speak.
 */
export function sumUp(
  prepared: Prepared,
  burn: Burn,
  prediction: Prediction,
  v: Float64Array,
  path: MixturePath,
  knots: Knots,
  residual: Float64Array,
  weight: Float64Array,
): RawSums {
  const n = prepared.cellCount
  const cells = new Float64Array(n * n)
  const pull = new Float64Array(n)
  const cross = new Float64Array(knots.count * n)
  const knotDiagonal = new Float64Array(knots.count)
  const knotBeside = new Float64Array(knots.count)
  const knotPull = new Float64Array(knots.count)
  walkRows(prepared, burn, prediction, v, path, (i, row) => {
    const w = weight[i]!
    if (w === 0) return
    const y = residual[i]!
    const { lower, share } = knotAt(knots, prepared.timeS[i]!)
    const before = w * (1 - share)
    const after = w * share
    for (let p = 0; p < row.count; p += 1) {
      const cell = row.cells[p]!
      const value = row.values[p]!
      const scaled = w * value
      pull[cell]! += scaled * y
      cross[lower * n + cell]! += before * value
      cross[(lower + 1) * n + cell]! += after * value
      for (let q = 0; q <= p; q += 1) {
        const other = row.cells[q]!
        cells[cell >= other ? cell * n + other : other * n + cell]! += scaled * row.values[q]!
      }
    }
    knotDiagonal[lower]! += before * (1 - share)
    knotDiagonal[lower + 1]! += after * share
    knotBeside[lower]! += before * share
    knotPull[lower]! += before * y
    knotPull[lower + 1]! += after * y
  })
  return { n, knots, cells, pull, cross, knotDiagonal, knotBeside, knotPull }
}

/** Measured minus predicted ln lambda; for a censored sample only what exceeds the limit, else 0. */
export function residualInto(out: Float64Array, prepared: Prepared, prediction: Prediction): void {
  for (let i = 0; i < prepared.n; i += 1) {
    const e = prepared.lnLambda[i]! + prediction.lnPhi[i]!
    // Past its rich limit the sensor only says "no leaner than this": it speaks when the model predicts leaner.
    out[i] = prepared.role[i] === Role.censored ? Math.min(0, e) : e
  }
}
