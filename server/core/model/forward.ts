/** The forward model: what the sensor would read with a given VE surface, and how each cell moves that reading. */
import type { MixturePath } from './path.ts'
import type { Prepared } from './prepare.ts'
import { settleAfterCutS } from '../evidence/masks.ts'

/** What the surface alone decides, n long each. */
export interface Burn {
  /** VE at each sample, %. */
  readonly ve: Float64Array
  /** Exhaust mass that has left the valves since the start of the log, kg; never falls. */
  readonly massKg: Float64Array
}

/** What the path adds, n long each. */
export interface Prediction {
  /** Equivalence ratio that leaves the valves. */
  readonly phi: Float64Array
  /** ln of the equivalence ratio the sensor shows. */
  readonly lnPhi: Float64Array
  /** The reading at i was burnt between samples source[i] and source[i] + 1 … */
  readonly source: Int32Array
  /** … at this share of the way. */
  readonly share: Float64Array
  /** 1 where the reading's whole past is known and free of cut fuel. */
  readonly clear: Uint8Array
}

/** @param v VE of every cell, %. O(samples). */
export function burnWith(prepared: Prepared, v: Float64Array, stoichAfr: number): Burn {
  const { n, cells, weights, asked, airPerVe, dtS } = prepared
  const ve = new Float64Array(n)
  const massKg = new Float64Array(n)
  let before = 0
  for (let i = 0; i < n; i += 1) {
    let sum = 0
    for (let k = 4 * i; k < 4 * i + 4; k += 1) sum += weights[k]! * v[cells[k]!]!
    ve[i] = sum
    // Air and the fuel in it: asked is the VE that fuel would burn at stoichiometry.
    const flow = airPerVe[i]! * (sum + asked[i]! / stoichAfr)
    massKg[i] = (i > 0 ? massKg[i - 1]! : 0) + 0.5 * (flow + before) * dtS[i]!
    before = flow
  }
  return { ve, massKg }
}

export const emptyPrediction = (n: number): Prediction => ({
  phi: new Float64Array(n),
  lnPhi: new Float64Array(n),
  source: new Int32Array(n),
  share: new Float64Array(n),
  clear: new Uint8Array(n),
})

/**
 * How much of a first-order state is left after a step: exp(−dt / tau), 0 where the log starts afresh or there is no lag.
 * Steps mostly repeat, so the last answer is kept.
 */
export function fading(tauS: number): (dtS: number) => number {
  let lastDt = Number.NaN
  let last = 0
  return (dt) => {
    if (dt !== lastDt) {
      lastDt = dt
      last = dt > 0 && tauS > 0 ? Math.exp(-dt / tauS) : 0
    }
    return last
  }
}

/** Equivalence ratio that leaves the valves: asked fuel by way of the wall, over air. Mutates `phi`. */
function portPhiInto(phi: Float64Array, prepared: Prepared, ve: Float64Array, path: MixturePath): void {
  const { n, dtS, asked, airPerVe } = prepared
  const fade = fading(path.filmTauS)
  let film = 0
  let before = 0
  for (let i = 0; i < n; i += 1) {
    const fuel = asked[i]! * airPerVe[i]!
    const dt = dtS[i]!
    const keep = fade(dt)
    // The flow of the sample before is what fed the film over the step; a log that starts afresh starts in balance.
    film = dt === 0 ? path.filmShare * fuel : keep * film + (1 - keep) * path.filmShare * before
    phi[i] = ((1 - path.filmShare) * fuel + film) / (airPerVe[i]! * ve[i]!)
    before = fuel
  }
}

/**
 * Film, plug flow and lag. Plug flow: what reaches the sensor at t left the valves when the exhaust mass was that of
 * t − t0 less the mass in the pipe. Both pointers only move forward, since time and mass only grow. Mutates and returns
 * `out`. O(samples).
 */
export function predictInto(out: Prediction, prepared: Prepared, burn: Burn, path: MixturePath): Prediction {
  const { n, timeS, dtS, sinceCutS } = prepared
  const { massKg } = burn
  const { phi, lnPhi, source, share, clear } = out
  portPhiInto(phi, prepared, burn.ve, path)
  let start = 0
  let atTime = 0
  let atMass = 0
  let shown = 0
  const fade = fading(path.lagS)
  for (let i = 0; i < n; i += 1) {
    const dt = dtS[i]!
    if (dt === 0) start = atTime = atMass = i
    const moment = timeS[i]! - path.t0S
    while (atTime + 1 <= i && timeS[atTime + 1]! <= moment) atTime += 1
    const wanted = between(massKg, timeS, atTime, i, moment) - path.massKg
    while (atMass + 1 <= i && massKg[atMass + 1]! <= wanted) atMass += 1
    const isKnown = moment >= timeS[start]! && wanted >= massKg[start]!
    const step = atMass < i ? massKg[atMass + 1]! - massKg[atMass]! : 0
    const a = isKnown && step > 0 ? Math.max(0, (wanted - massKg[atMass]!) / step) : 0
    source[i] = atMass
    share[i] = a
    const arrived = a > 0 ? phi[atMass]! + a * (phi[atMass + 1]! - phi[atMass]!) : phi[atMass]!
    shown = arrived + fade(dt) * (shown - arrived)
    lnPhi[i] = Math.log(shown)
    const isSettled = sinceCutS[atMass]! > settleAfterCutS && (a === 0 || sinceCutS[atMass + 1]! > settleAfterCutS)
    clear[i] = isKnown && isSettled && shown > 0.2 ? 1 : 0
  }
  return out
}

/** `y` at `x`, linear between sample `at` and the next, which must not pass `last`; `xs` grows. */
function between(y: Float64Array, xs: Float64Array, at: number, last: number, x: number): number {
  if (at >= last) return y[at]!
  const span = xs[at + 1]! - xs[at]!
  return span > 0 ? y[at]! + ((x - xs[at]!) / span) * (y[at + 1]! - y[at]!) : y[at]!
}

/** One row of the model's derivatives at a time: how each cell moves ln of the lambda shown at a sample. */
export interface RowWalk {
  /** Cells that matter at the present sample: the first `count` entries. */
  readonly cells: Int32Array
  /** Their derivatives d ln lambda / d ln VE, beside `cells`; they sum to about 1. */
  readonly values: Float64Array
  count: number
}

/** Cells whose share of a reading has faded below this are forgotten. */
const faded = 1e-4

/**
 * Walks through the samples; delay and lag are linear, so they act on the weights as they act on the mixture.
 * Calls `visit` for every sample with the row of that sample. O(samples · cells crossed within a few lags).
 */
export function walkRows(
  prepared: Prepared,
  burn: Burn,
  prediction: Prediction,
  v: Float64Array,
  path: MixturePath,
  visit: (i: number, row: RowWalk) => void,
): void {
  const { n, dtS, cells, weights } = prepared
  const { source, share, lnPhi, phi } = prediction
  const state = new Float64Array(prepared.cellCount)
  const isActive = new Uint8Array(prepared.cellCount)
  const active = new Int32Array(prepared.cellCount)
  let activeCount = 0
  const row: RowWalk = {
    cells: new Int32Array(prepared.cellCount),
    values: new Float64Array(prepared.cellCount),
    count: 0,
  }
  const fade = fading(path.lagS)
  const add = (sample: number, factor: number) => {
    const scale = (factor * phi[sample]!) / burn.ve[sample]!
    for (let k = 4 * sample; k < 4 * sample + 4; k += 1) {
      if (weights[k] === 0) continue
      const cell = cells[k]!
      if (isActive[cell] === 0) {
        isActive[cell] = 1
        active[activeCount] = cell
        activeCount += 1
        state[cell] = 0
      }
      state[cell]! += scale * weights[k]! * v[cell]!
    }
  }
  for (let i = 0; i < n; i += 1) {
    const keep = fade(dtS[i]!)
    let kept = 0
    for (let k = 0; k < activeCount; k += 1) {
      const cell = active[k]!
      state[cell]! *= keep
      if (state[cell]! < faded) isActive[cell] = 0
      else {
        active[kept] = cell
        kept += 1
      }
    }
    activeCount = kept
    const a = share[i]!
    add(source[i]!, (1 - keep) * (1 - a))
    if (a > 0) add(source[i]! + 1, (1 - keep) * a)
    const shown = Math.exp(-lnPhi[i]!)
    row.count = activeCount
    for (let k = 0; k < activeCount; k += 1) {
      row.cells[k] = active[k]!
      row.values[k] = state[active[k]!]! * shown
    }
    visit(i, row)
  }
}
