/** Delay, lag and film of one log, fitted together: without the film the lag would imitate it. */
import { emptyPrediction, predictInto, type Burn } from '../model/forward.ts'
import { usualPath, usualPathSd, type MixturePath } from '../model/path.ts'
import { Role, type Prepared } from '../model/prepare.ts'
import { factorInPlace, solveInto } from './cholesky.ts'

const names = ['t0S', 'massKg', 'lagS', 'filmShare', 'filmTauS'] as const
const lowest: MixturePath = { t0S: 0, massKg: 0, lagS: 0.005, filmShare: 0, filmTauS: 0.05 }
const highest: MixturePath = { t0S: 0.5, massKg: 8e-3, lagS: 0.6, filmShare: 0.7, filmTauS: 4 }

/** Scatter at which a residual begins to count less. */
const scatter = 1.5 * 0.015
/** About how many readings in a row say the same. */
const repetition = 8
const iterations = 12
/** In units of log likelihood: one standard deviation is worth 0.5. */
const enoughGain = 0.02

const clipped = (values: readonly number[]): MixturePath =>
  Object.fromEntries(
    names.map((name, i) => [name, Math.min(highest[name], Math.max(lowest[name], values[i]!))]),
  ) as unknown as MixturePath

/**
 * Least robust misfit of the scalar prediction plus the prior, by Levenberg-Marquardt with numeric derivatives.
 * The table stays fixed. O(samples · 6 · iterations).
 * @param drift  ln, at every sample.
 */
export function fitPath(whole: Prepared, wholeBurn: Burn, wholeDrift: Float64Array, from: MixturePath): MixturePath {
  const { prepared, burn, drift } = atEnoughRate(whole, wholeBurn, wholeDrift)
  const { n, role, lnLambda } = prepared
  const prediction = emptyPrediction(n)
  const spokenFor = new Uint8Array(n)
  const residualsOf = (path: MixturePath): Float64Array => {
    predictInto(prediction, prepared, burn, path)
    const out = new Float64Array(n)
    for (let i = 0; i < n; i += 1)
      if (role[i] === Role.speaks && spokenFor[i] === 1) out[i] = lnLambda[i]! + prediction.lnPhi[i]! - drift[i]!
    return out
  }
  predictInto(prediction, prepared, burn, from)
  // The same samples throughout, or the cost would fall by losing some: those whose past is known for twice the delay.
  const wide = emptyPrediction(n)
  predictInto(wide, prepared, burn, { ...from, t0S: from.t0S + 0.15, massKg: from.massKg * 2 + 5e-4 })
  for (let i = 0; i < n; i += 1) spokenFor[i] = prediction.clear[i]! & wide.clear[i]!

  const costOf = (residual: Float64Array, path: MixturePath): number => {
    let sum = 0
    for (let i = 0; i < n; i += 1) {
      const ratio = residual[i]! / scatter
      if (Number.isFinite(ratio)) sum += Math.sqrt(1 + ratio * ratio) - 1
    }
    const belief = names.reduce((total, name) => total + ((path[name] - usualPath[name]) / usualPathSd[name]) ** 2, 0)
    return (2.25 / repetition) * sum + 0.5 * belief
  }
  let path = from
  let residual = residualsOf(path)
  let cost = costOf(residual, path)
  let damping = 1e-2
  for (let round = 0; round < iterations; round += 1) {
    const { a, b } = equations(path, residual, residualsOf)
    let isBetter = false
    for (let attempt = 0; attempt < 5 && !isBetter; attempt += 1) {
      const tried = stepFrom(path, a, b, damping)
      const triedResidual = residualsOf(tried)
      const triedCost = costOf(triedResidual, tried)
      if (triedCost < cost) {
        isBetter = true
        const gain = cost - triedCost
        path = tried
        residual = triedResidual
        cost = triedCost
        damping /= 5
        if (gain < enoughGain) return path
      } else damping *= 6
    }
    if (!isBetter) return path
  }
  return path
}

/** Delays are tens of milliseconds; readings closer together than this add work, not knowledge. */
const enoughHz = 25

/** Every k-th sample of a fast log; film and lag take the longer steps as they are. */
function atEnoughRate(prepared: Prepared, burn: Burn, drift: Float64Array) {
  const every = Math.floor(1 / (enoughHz * prepared.medianDtS))
  if (every < 2) return { prepared, burn, drift }
  const kept: number[] = []
  // A restart keeps its first sample, so that no step bridges it.
  for (let i = 0, next = 0; i < prepared.n; i += 1) {
    if (prepared.dtS[i] === 0) next = i
    if (i !== next) continue
    kept.push(i)
    next = i + every
  }
  const pick = (values: Float64Array) => Float64Array.from(kept, (i) => values[i]!)
  const timeS = pick(prepared.timeS)
  return {
    drift: pick(drift),
    burn: { ve: pick(burn.ve), massKg: pick(burn.massKg) },
    prepared: {
      ...prepared,
      n: kept.length,
      timeS,
      dtS: timeS.map((time, k) => (prepared.dtS[kept[k]!] === 0 ? 0 : time - timeS[k - 1]!)),
      asked: pick(prepared.asked),
      airPerVe: pick(prepared.airPerVe),
      lnLambda: pick(prepared.lnLambda),
      role: Uint8Array.from(kept, (i) => prepared.role[i]!),
      sinceCutS: pick(prepared.sinceCutS),
    },
  }
}

/** Normal equations of the pseudo-Huber cost and the prior, in units of the prior's sd: 5 × 5 and 5. */
function equations(
  path: MixturePath,
  residual: Float64Array,
  residualsOf: (path: MixturePath) => Float64Array,
): { a: Float64Array; b: Float64Array } {
  const slopes = names.map((name) => {
    const step = 0.05 * usualPathSd[name]
    const isUp = path[name] + step <= highest[name]
    const moved = residualsOf({ ...path, [name]: path[name] + (isUp ? step : -step) })
    return moved.map((value, i) => ((value - residual[i]!) / step) * (isUp ? 1 : -1) * usualPathSd[name])
  })
  const a = new Float64Array(25)
  const b = new Float64Array(5)
  for (let i = 0; i < residual.length; i += 1) {
    const e = residual[i]!
    if (e === 0 || !Number.isFinite(e)) continue
    const weight = 2.25 / repetition / scatter ** 2 / Math.sqrt(1 + (e / scatter) ** 2)
    for (let p = 0; p < 5; p += 1) {
      const slope = slopes[p]![i]!
      if (!Number.isFinite(slope)) continue
      b[p]! -= weight * slope * e
      for (let q = 0; q <= p; q += 1) a[5 * p + q]! += weight * slope * slopes[q]![i]!
    }
  }
  names.forEach((name, p) => {
    a[6 * p]! += 1
    b[p]! -= (path[name] - usualPath[name]) / usualPathSd[name]
  })
  return { a, b }
}

function stepFrom(path: MixturePath, a: Float64Array, b: Float64Array, damping: number): MixturePath {
  const damped = a.map((value, i) => (i % 6 === 0 ? value * (1 + damping) : value))
  const step = b.slice()
  if (!factorInPlace(damped, 5)) return path
  solveInto(step, damped, 5)
  return clipped(names.map((name, p) => path[name] + step[p]! * usualPathSd[name]))
}
