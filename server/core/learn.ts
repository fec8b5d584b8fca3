/** The one door of the learner: logs, engine and the present table in; a proposal with its uncertainty out. */
import { cellCount, valueAt, type Grid } from '../../shared/grid.ts'
import type { Drive, EngineFacts } from './drive.ts'
import { handAverage } from './evidence/hand.ts'
import { airFlowKgS, evidenceSeconds, observe, totalDelayS, usualDelay, type Observations } from './evidence/samples.ts'
import { estimate, type Estimate } from './fit/estimate.ts'
import { guard, type HeldCell } from './fit/guard.ts'
import { smoothPrior } from './fit/prior.ts'
import { refusalOf, type LearnRefusal } from './evidence/refuse.ts'

/** Grows with every change that can change a number. Frozen with each proposal. */
export const coreVersion = 'core-1'

export interface LearnSettings {
  /** Largest step of a cell in one revision, %. */
  readonly stepCapPct: number
}

export interface LearnInput {
  readonly drives: readonly Drive[]
  readonly engine: EngineFacts
  /** The table to propose on. */
  readonly grid: Grid
  /** VE of the present revision on that grid, %. */
  readonly current: Float64Array
  readonly settings: LearnSettings
}

/** Called as work goes on: what is done, how many of how many. */
export type LearnProgress = (step: string, done: number, total: number) => void

export interface Learned {
  readonly grid: Grid
  readonly current: Float64Array
  /** VE of the fitted surface, %. */
  readonly fitted: Float64Array
  /** The same after guard and step cap; cells without evidence keep their current value. */
  readonly proposed: Float64Array
  readonly evidenceS: Float64Array
  readonly hasEvidence: Uint8Array
  /** One standard deviation, % of the value. */
  readonly sigmaPct: Float64Array
  readonly misfitPct: Float64Array
  readonly handNearest: Float64Array
  readonly handBilinear: Float64Array
  readonly held: readonly HeldCell[]
  readonly leftOut: readonly { driveId: string; totalS: number; usedS: number; leftOutS: Record<string, number> }[]
  /** Total delay from injection to reading at idle, cruise and full load, s. */
  readonly delay: { readonly idleS: number; readonly cruiseS: number; readonly fullS: number }
  readonly coreVersion: string
}

export type LearnResult = { readonly ok: true; readonly proposal: Learned } | LearnRefusal

/** Less than this many useful seconds is no evidence. */
const leastEvidenceS = 0.3

/** Learns the VE surface. Deterministic: the same input gives the same bits. */
export function learn(input: LearnInput, progress: LearnProgress = () => undefined): LearnResult {
  const { drives, engine, grid, current } = input
  const observations: Observations[] = []
  for (const drive of drives) {
    const seen = observe(drive, engine, grid, usualDelay)
    const refusal = refusalOf(drive, seen)
    if (refusal) return refusal
    observations.push(seen)
    progress('Looking at what each log can teach', observations.length, drives.length)
  }
  const base = current.map(Math.log)
  const prior = smoothPrior(grid, base, { curvature: 1.25, gradient: 1 })
  const fit = estimate(observations, prior, base, (done, total) => progress('Fitting the surface', done, total))
  if (!fit)
    return {
      ok: false,
      reason: 'not-solvable',
      detail: 'The table could not be fitted: the equations have no single answer.',
    }
  return { ok: true, proposal: propose(input, observations, fit) }
}

function propose(input: LearnInput, observations: readonly Observations[], fit: Estimate): Learned {
  const { grid, current, drives, engine } = input
  const n = cellCount(grid)
  const evidenceS = evidenceSeconds(observations, n)
  const hasEvidence = Uint8Array.from(evidenceS, (seconds) => (seconds >= leastEvidenceS ? 1 : 0))
  const fitted = fit.x.map(Math.exp)
  const { proposed, held } = guard({
    grid,
    current,
    fitted,
    sigma: fit.sigma,
    evidenceS,
    hasEvidence,
    stepCapPct: input.settings.stepCapPct,
  })
  const delayAt = (rpm: number, mapKpa: number) =>
    totalDelayS(usualDelay, airFlowKgS(valueAt(grid, fitted, rpm, mapKpa), mapKpa, engine.displacementL, rpm, 30))
  return {
    grid,
    current,
    fitted,
    proposed,
    evidenceS: evidenceS.map((seconds, cell) => (hasEvidence[cell] ? seconds : 0)),
    hasEvidence,
    sigmaPct: fit.sigma.map((sigma) => 100 * sigma),
    misfitPct: fit.misfit.map((value, cell) => (hasEvidence[cell] ? 100 * value : Number.NaN)),
    handNearest: handAverage(observations, n, true),
    handBilinear: handAverage(observations, n, false),
    held,
    leftOut: observations.map((each, i) => ({ driveId: drives[i]!.id, ...each.masks })),
    delay: {
      idleS: delayAt(800, 35),
      cruiseS: delayAt(2500, 55),
      fullS: delayAt(0.8 * engine.revLimitRpm, Math.min(grid.mapKpa.at(-1)!, 100)),
    },
    coreVersion,
  }
}
