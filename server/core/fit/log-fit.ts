/** One log by itself: its path, drift, noise and prior are found, and what it says of the cells becomes a form to add. */
import { burnWith, emptyPrediction, predictInto, type Burn, type Prediction } from '../model/forward.ts'
import { usualPath, type MixturePath } from '../model/path.ts'
import { Role, type Prepared } from '../model/prepare.ts'
import { driftAt, eliminateDrift, type QuadraticForm } from './drift.ts'
import { autocorrelationInflation, huberWeight, robustSd, stirOf, transientSd } from './noise.ts'
import { knotAt, knotsFor, residualInto, sumUp, type Knots, type RawSums } from './normal.ts'
import { fitPath } from './path-fit.ts'
import { priorOf, type PriorParts, type PriorScale } from './prior.ts'
import { choosePrior, gather, solveSystem } from './system.ts'

/** What is settled for a log before its form is taken; kept with the form, so that it can be taken again elsewhere. */
export interface LogNature {
  readonly path: MixturePath
  readonly driftSd: number
  /** Readings one independent reading is worth. */
  readonly inflation: number
  /** Robust standard deviation of the residual once drift is out, ln. */
  readonly noise: number
}

export interface LogFit {
  readonly nature: LogNature
  readonly form: QuadraticForm
  /** ln VE the form was taken at, n. */
  readonly at: Float64Array
  /** Residual of every sample with drift out, ln; NaN where it does not speak. */
  readonly residual: Float64Array
  readonly prediction: Prediction
}

/** Level of one drive against another, ln. */
export const usualLevelSd = 0.005
const usualDriftSd = 0.007
const driftSds = [0.003, 0.0045, 0.007, 0.01, 0.014, 0.02]
const knotStepS = 10
const usualScale: PriorScale = { curvature: 1.25, gradient: 1 }
const passes = 6
const largestStep = 0.5

/** The moving parts of a fit in progress. */
interface State {
  x: Float64Array
  path: MixturePath
  driftSd: number
  scale: PriorScale
  /** ln, every sample. */
  drift: Float64Array
  noise: Noise | null
}
interface Noise {
  readonly sd: Float64Array
  readonly inflation: number
  readonly robust: number
}

interface Scene {
  readonly prepared: Prepared
  readonly stoichAfr: number
  readonly knots: Knots
}

/** First look: nothing is known of the scatter yet. */
const firstSd = 0.05

function look(
  scene: Scene,
  state: State,
): { burn: Burn; prediction: Prediction; residual: Float64Array; v: Float64Array } {
  const { prepared } = scene
  const v = state.x.map(Math.exp)
  const burn = burnWith(prepared, v, scene.stoichAfr)
  const prediction = predictInto(emptyPrediction(prepared.n), prepared, burn, state.path)
  const residual = new Float64Array(prepared.n)
  residualInto(residual, prepared, prediction)
  return { burn, prediction, residual, v }
}

function noiseOf(scene: Scene, state: State, seen: ReturnType<typeof look>): Noise {
  const { prepared } = scene
  const { prediction, residual } = seen
  const bare = residual.map((value, i) => value - state.drift[i]!)
  const speaking = bare.filter((_, i) => prepared.role[i] === Role.speaks && prediction.clear[i] === 1)
  const stir = stirOf(prepared, seen.burn, prediction, state.path.lagS)
  const robust = robustSd(speaking)
  return {
    sd: transientSd(prepared, prediction, stir, bare),
    robust,
    inflation: autocorrelationInflation(speaking, prepared.medianDtS, robust),
  }
}

/** 1 / variance of every sample; 0 where it says nothing. */
function weightsOf(scene: Scene, state: State, seen: ReturnType<typeof look>): Float64Array {
  const { prepared } = scene
  const weight = new Float64Array(prepared.n)
  const inflation = state.noise?.inflation ?? 1
  for (let i = 0; i < prepared.n; i += 1) {
    if (prepared.role[i] === Role.silent || seen.prediction.clear[i] === 0) continue
    if (prepared.role[i] === Role.censored && seen.residual[i] === 0) continue
    const sd = state.noise?.sd[i] ?? firstSd
    weight[i] = huberWeight((seen.residual[i]! - state.drift[i]!) / sd) / (sd * sd * inflation)
  }
  return weight
}

/** The log's sums at the present state; judges the scatter first, unless it is the first look. Mutates `state.noise`. */
function sums(
  scene: Scene,
  state: State,
  isFirst = false,
): { raw: RawSums; seen: ReturnType<typeof look>; noise: Noise | null } {
  const seen = look(scene, state)
  if (!isFirst) state.noise = noiseOf(scene, state, seen)
  const weight = weightsOf(scene, state, seen)
  const raw = sumUp(scene.prepared, seen.burn, seen.prediction, seen.v, state.path, scene.knots, seen.residual, weight)
  return { raw, seen, noise: state.noise }
}

function driftOf(scene: Scene, state: State, raw: RawSums, form: QuadraticForm, step: Float64Array): Float64Array {
  const { knots } = driftAt(raw, form, step, state.driftSd, usualLevelSd)
  return scene.prepared.timeS.map((time) => {
    const { lower, share } = knotAt(scene.knots, time)
    return (1 - share) * knots[lower]! + share * knots[lower + 1]!
  })
}

/** Chooses how much the drift wanders by evidence, the prior's scales given: uphill from the usual size. */
function chooseDriftSd(
  raw: RawSums,
  at: Float64Array,
  parts: PriorParts,
  base: Float64Array,
  scale: PriorScale,
): number {
  const prior = priorOf(parts, base, scale)
  const scores = new Map<number, number>()
  const score = (index: number): number => {
    const sd = driftSds[index]
    if (sd === undefined) return -Infinity
    if (!scores.has(index)) {
      const solution = solveSystem(gather([{ form: eliminateDrift(raw, sd), at }], at, usualLevelSd), prior)
      scores.set(index, (solution?.lnEvidence ?? -Infinity) - (Math.log(sd / usualDriftSd) / 0.6) ** 2 / 2)
    }
    return scores.get(index)!
  }
  let best = driftSds.indexOf(usualDriftSd)
  for (;;) {
    const next = score(best + 1) > score(best - 1) ? best + 1 : best - 1
    if (score(next) <= score(best)) return driftSds[best]!
    best = next
  }
}

/**
 * Fits one log: three Gauss-Newton passes, the path after the second; then prior and drift by evidence; three more.
 * @param base    ln of the table flashed in this drive, on the grid, n.
 * @param report  called after each pass.
 */
export function fitLog(
  prepared: Prepared,
  stoichAfr: number,
  parts: PriorParts,
  base: Float64Array,
  report: (done: number, total: number) => void = () => undefined,
): LogFit {
  const scene: Scene = { prepared, stoichAfr, knots: knotsFor(prepared.timeS, knotStepS) }
  const state: State = {
    x: base.slice(),
    path: usualPath,
    driftSd: usualDriftSd,
    scale: usualScale,
    drift: new Float64Array(prepared.n),
    noise: null,
  }
  for (let pass = 1; pass <= passes; pass += 1) {
    const { raw } = sums(scene, state, pass === 1)
    if (pass === passes / 2) {
      const gathered = gather([{ form: eliminateDrift(raw, state.driftSd), at: state.x }], state.x, usualLevelSd)
      state.scale = choosePrior(parts, base, gathered)?.scale ?? state.scale
      state.driftSd = chooseDriftSd(raw, state.x, parts, base, state.scale)
    }
    const form = eliminateDrift(raw, state.driftSd)
    const solution = solveSystem(
      gather([{ form, at: state.x }], state.x, usualLevelSd),
      priorOf(parts, base, state.scale),
    )
    if (!solution) break
    const step = solution.x.map((value, i) => Math.max(-largestStep, Math.min(largestStep, value - state.x[i]!)))
    state.drift = driftOf(scene, state, raw, form, step)
    state.x = state.x.map((value, i) => value + step[i]!)
    if (pass === 2 || pass === 4)
      state.path = fitPath(prepared, burnWith(prepared, state.x.map(Math.exp), stoichAfr), state.drift, state.path)
    report(pass, passes)
  }
  return formAt(scene, state)
}

/** The form at another surface, with path, drift size and noise as they were found. @param x ln VE, n. */
export function retakeForm(prepared: Prepared, stoichAfr: number, x: Float64Array, nature: LogNature): LogFit {
  const scene: Scene = { prepared, stoichAfr, knots: knotsFor(prepared.timeS, knotStepS) }
  const state: State = {
    x,
    path: nature.path,
    driftSd: nature.driftSd,
    scale: usualScale,
    drift: new Float64Array(prepared.n),
    noise: null,
  }
  // Twice: the scatter is judged once with the drift still in it, and once without.
  for (let pass = 0; pass < 2; pass += 1) {
    const { raw } = sums(scene, state)
    state.drift = driftOf(scene, state, raw, eliminateDrift(raw, state.driftSd), new Float64Array(x.length))
  }
  return formAt(scene, state)
}

function formAt(scene: Scene, state: State): LogFit {
  const { raw, seen, noise } = sums(scene, state)
  const { path, driftSd } = state
  return {
    nature: { path, driftSd, inflation: noise?.inflation ?? 1, noise: noise?.robust ?? firstSd },
    form: eliminateDrift(raw, driftSd),
    at: state.x,
    prediction: seen.prediction,
    residual: seen.residual.map((value, i) =>
      scene.prepared.role[i] === Role.speaks && seen.prediction.clear[i] === 1 ? value - state.drift[i]! : Number.NaN,
    ),
  }
}
