/** Slow drift of fuel pressure, sensor and weather: a state of its own, eliminated from a log's sums. */
import type { RawSums } from './normal.ts'

/** What one log says of the cells once its drift is accounted for; its level is kept apart, since logs differ in it. */
export interface QuadraticForm {
  /** Σ w r rᵀ less what drift explains, n × n, row-major, lower triangle. */
  readonly cells: Float64Array
  /** n. */
  readonly pull: Float64Array
  /** Cells against the log's level, n. */
  readonly level: Float64Array
  readonly levelWeight: number
  readonly levelPull: number
  /** ln of the evidence the drift adds; only differences between drift sizes mean something. */
  readonly lnEvidence: number
}

export const driftTauS = 40

/** Tridiagonal precision of an Ornstein-Uhlenbeck process at evenly spaced knots: its ends, middle and side entries. */
function driftPrecision(
  sd: number,
  stepS: number,
  tauS: number,
): { end: number; middle: number; beside: number; lnDet: (k: number) => number } {
  const rho = Math.exp(-stepS / tauS)
  const scale = 1 / (sd * sd * (1 - rho * rho))
  return {
    end: scale,
    middle: scale * (1 + rho * rho),
    beside: -scale * rho,
    lnDet: (k) => -2 * k * Math.log(sd) - (k - 1) * Math.log(1 - rho * rho),
  }
}

/** Bidiagonal Cholesky factor of the drift's equations: diagonal and what stands below it, k each. */
interface DriftFactor {
  readonly diagonal: Float64Array
  readonly below: Float64Array
  readonly lnDetRatio: number
}

function factorDrift(raw: RawSums, sd: number, tauS: number): DriftFactor {
  const k = raw.knots.count
  const prior = driftPrecision(sd, raw.knots.stepS, tauS)
  const diagonal = new Float64Array(k)
  const below = new Float64Array(k)
  let lnDet = 0
  for (let i = 0; i < k; i += 1) {
    const own = raw.knotDiagonal[i]! + (i === 0 || i === k - 1 ? prior.end : prior.middle)
    if (i > 0) below[i] = (raw.knotBeside[i - 1]! + prior.beside) / diagonal[i - 1]!
    diagonal[i] = Math.sqrt(own - below[i]! ** 2)
    lnDet += 2 * Math.log(diagonal[i]!)
  }
  return { diagonal, below, lnDetRatio: lnDet - prior.lnDet(k) }
}

/** L⁻¹ b. */
function forwardSolve({ diagonal, below }: DriftFactor, b: Float64Array): Float64Array {
  const out = new Float64Array(b.length)
  for (let i = 0; i < b.length; i += 1) out[i] = (b[i]! - (i > 0 ? below[i]! * out[i - 1]! : 0)) / diagonal[i]!
  return out
}

/** (L Lᵀ)⁻¹ b. */
function solve(factor: DriftFactor, b: Float64Array): Float64Array {
  const out = forwardSolve(factor, b)
  for (let i = out.length - 1; i >= 0; i -= 1)
    out[i] = (out[i]! - (i + 1 < out.length ? factor.below[i + 1]! * out[i + 1]! : 0)) / factor.diagonal[i]!
  return out
}

const dot = (a: Float64Array, b: Float64Array): number => {
  let sum = 0
  for (let i = 0; i < a.length; i += 1) sum += a[i]! * b[i]!
  return sum
}

/** Since the hats sum to 1, the level's column against the knots is the row sum of their matrix. */
function levelAgainstKnots(raw: RawSums): Float64Array {
  return raw.knotDiagonal.map((value, i) => value + raw.knotBeside[i]! + (i > 0 ? raw.knotBeside[i - 1]! : 0))
}

/**
 * Schur complement of the drift. O(n² k / 2) for n cells and k knots.
 * @param sd  standard deviation of the drift, ln.
 */
export function eliminateDrift(raw: RawSums, sd: number, tauS = driftTauS): QuadraticForm {
  const { n, knots } = raw
  const factor = factorDrift(raw, sd, tauS)
  const pullY = forwardSolve(factor, raw.knotPull)
  const levelRaw = levelAgainstKnots(raw)
  const levelY = forwardSolve(factor, levelRaw)
  const cells = raw.cells.slice()
  const pull = raw.pull.slice()
  const level = new Float64Array(n)
  for (let k = 0; k < knots.count; k += 1) for (let i = 0; i < n; i += 1) level[i]! += raw.cross[k * n + i]!
  const y = new Float64Array(n)
  const touched = new Int32Array(n)
  for (let k = 0; k < knots.count; k += 1) {
    let count = 0
    for (let i = 0; i < n; i += 1) {
      y[i] = (raw.cross[k * n + i]! - (k > 0 ? factor.below[k]! * y[i]! : 0)) / factor.diagonal[k]!
      if (y[i] !== 0) {
        touched[count] = i
        count += 1
      }
    }
    for (let p = 0; p < count; p += 1) {
      const row = touched[p]!
      const value = y[row]!
      pull[row]! -= value * pullY[k]!
      level[row]! -= value * levelY[k]!
      for (let q = 0; q <= p; q += 1) cells[row * n + touched[q]!]! -= value * y[touched[q]!]!
    }
  }
  return {
    cells,
    pull,
    level,
    levelWeight: levelRaw.reduce((sum, value) => sum + value, 0) - dot(levelY, levelY),
    levelPull: raw.knotPull.reduce((sum, value) => sum + value, 0) - dot(levelY, pullY),
    lnEvidence: 0.5 * dot(pullY, pullY) - 0.5 * factor.lnDetRatio,
  }
}

/** The log's level and drift at a solution: one value for all of it, and one at each knot (level included). */
export function driftAt(
  raw: RawSums,
  form: QuadraticForm,
  step: Float64Array,
  sd: number,
  levelSd: number,
  tauS = driftTauS,
): { level: number; knots: Float64Array } {
  const level = (form.levelPull - dot(form.level, step)) / (form.levelWeight + 1 / levelSd ** 2)
  const own = levelAgainstKnots(raw)
  const left = raw.knotPull.map((value, k) => {
    let explained = level * own[k]!
    for (let i = 0; i < raw.n; i += 1) explained += raw.cross[k * raw.n + i]! * step[i]!
    return value - explained
  })
  return { level, knots: solve(factorDrift(raw, sd, tauS), left).map((value) => value + level) }
}
