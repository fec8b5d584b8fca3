/** From the solution of all logs to a proposal: doubt, guard, evidence, and what each log brought. */
import { cellCount, valueAt, type Grid } from '../../shared/grid.ts'
import { diagnose, type Diagnosis } from './diagnose.ts'
import type { EngineFacts } from './drive.ts'
import { handAverage } from './evidence/hand.ts'
import type { MaskTotals } from './evidence/masks.ts'
import { inverseDiagonal } from './fit/cholesky.ts'
import type { Contradiction } from './fit/contradict.ts'
import { guard, type HeldCell } from './fit/guard.ts'
import type { PriorScale } from './fit/prior.ts'
import type { Solution } from './fit/system.ts'
import type { LogMemory } from './log-memory.ts'
import { airFlowKgS } from './model/airflow.ts'
import { totalDelayS, type MixturePath } from './model/path.ts'

/** Grows with every change that can change a number. Frozen with each proposal. */
export const coreVersion = 'core-3'

export interface LearnSettings {
  /** Largest step of a cell in one revision, %. */
  readonly stepCapPct: number
}

/** What a proposal is made on, beside the logs. */
export interface Ground {
  readonly engine: EngineFacts
  /** The table to propose on. */
  readonly grid: Grid
  /** VE of the present revision on that grid, %. */
  readonly current: Float64Array
  readonly settings: LearnSettings
}

/** What one log brings to a proposal. */
export interface LogShare extends MaskTotals {
  readonly driveId: string
  readonly path: MixturePath
  /** Robust standard deviation of what the fit could not explain, %. */
  readonly noisePct: number
  readonly driftPct: number
  /** How far the solution is from where the log was linearised, at most, % of VE in a cell the log has evidence in. */
  readonly farPct: number
  /** Chi-square per cell of this log against all others; above 2 it speaks of another engine. NaN for a lone log. */
  readonly disagreement: number
  /** Useful seconds in each cell, n long. */
  readonly evidenceS: Float64Array
}

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
  readonly visits: Int32Array
  readonly handNearest: Float64Array
  readonly handBilinear: Float64Array
  readonly held: readonly HeldCell[]
  /** Faults that look like a wrong table; empty where none stands out. */
  readonly diagnoses: readonly Diagnosis[]
  /** VE by the fuel actually delivered (pulse width and injector data), %; NaN where no pulse width is logged. */
  readonly byPulse: Float64Array
  readonly logs: readonly LogShare[]
  /** Delay, lag and film of the logs together. */
  readonly path: MixturePath
  /** Total delay from injection to reading at idle, cruise and full load, s. */
  readonly delay: { readonly idleS: number; readonly cruiseS: number; readonly fullS: number }
  readonly priorScale: PriorScale
  readonly levelSdPct: number
  readonly coreVersion: string
}

/** What all logs together say. */
export interface Together {
  readonly solution: Solution
  readonly scale: PriorScale
  readonly levelSd: number
  readonly disagreement: readonly Contradiction[]
}

/** Less than this many useful seconds is no evidence. */
const leastEvidenceS = 0.3
/** Largest distance of x from where a log was linearised, over the cells it has evidence in, %. */
function farthest(memory: LogMemory, x: Float64Array): number {
  let far = 0
  for (let cell = 0; cell < x.length; cell += 1)
    if (memory.evidenceS[cell]! >= leastEvidenceS) far = Math.max(far, 100 * Math.abs(x[cell]! - memory.at[cell]!))
  return far
}

/** The grid cannot follow the surface better than this, ln. */
const surfaceFloor = 0.004
/** Where no log speaks the surface is carried on by a prior that knows engines in general, not this one, ln. */
const extrapolationFloor = 0.012

/** One standard deviation of a cell, ln; the less evidence, the more of the extrapolation's. */
const doubtOf = (variance: number, evidenceS: number): number =>
  Math.sqrt(variance + surfaceFloor ** 2 + extrapolationFloor ** 2 * Math.max(0, 1 - evidenceS))

/** A proposal from the solution of all logs. O(cells³) for the variances. */
export function propose(logs: readonly LogMemory[], ground: Ground, together: Together): Learned {
  const { grid, current, engine } = ground
  const n = cellCount(grid)
  const { x, factor } = together.solution
  const total = (of: (log: LogMemory) => ArrayLike<number>) =>
    Float64Array.from({ length: n }, (_, cell) => logs.reduce((sum, log) => sum + of(log)[cell]!, 0))
  const evidenceS = total((log) => log.evidenceS)
  const hasEvidence = Uint8Array.from(evidenceS, (seconds) => (seconds >= leastEvidenceS ? 1 : 0))
  const misfit = total((log) => log.misfitSum)
  const fitted = x.map(Math.exp)
  const sigma = inverseDiagonal(factor, n).map((variance, cell) => doubtOf(variance, evidenceS[cell]!))
  const { proposed, held } = guard({
    grid,
    current,
    fitted,
    sigma,
    evidenceS,
    hasEvidence,
    stepCapPct: ground.settings.stepCapPct,
  })
  const path = meanPath(logs)
  const mean = (of: (log: LogMemory) => Float64Array) => meanByEvidence(logs, of, n)
  const routeGap = mean((log) => log.routeGap)
  const delayAt = (rpm: number, mapKpa: number) =>
    totalDelayS(path, airFlowKgS(valueAt(grid, fitted, rpm, mapKpa), mapKpa, engine.displacementL, rpm, 30))
  return {
    grid,
    current,
    fitted,
    proposed,
    evidenceS: evidenceS.map((seconds, cell) => (hasEvidence[cell] ? seconds : 0)),
    hasEvidence,
    sigmaPct: sigma.map((value) => 100 * value),
    misfitPct: misfit.map((sum, cell) => (hasEvidence[cell] ? (100 * sum) / evidenceS[cell]! : Number.NaN)),
    visits: Int32Array.from(total((log) => log.visits)),
    handNearest: handAverage(
      logs.map((log) => log.handNearest),
      n,
    ),
    handBilinear: handAverage(
      logs.map((log) => log.handBilinear),
      n,
    ),
    held,
    diagnoses: diagnose({
      grid,
      correction: mean((log) => log.base).map((base, cell) => x[cell]! - base),
      sigma,
      evidenceS,
      inverseFlow: mean((log) => log.inverseFlow),
      inverseFilling: mean((log) => log.inverseFilling),
      routeGap,
    }),
    byPulse: fitted.map((ve, cell) => (hasEvidence[cell] ? ve * Math.exp(routeGap[cell]!) : Number.NaN)),
    logs: logs.map((log, i) => ({
      driveId: log.driveId,
      ...log.masks,
      path: log.nature.path,
      noisePct: 100 * log.nature.noise,
      driftPct: 100 * log.nature.driftSd,
      farPct: farthest(log, x),
      disagreement: together.disagreement[i]?.perCell ?? Number.NaN,
      evidenceS: log.evidenceS,
    })),
    path,
    delay: {
      idleS: delayAt(800, 35),
      cruiseS: delayAt(2500, 55),
      fullS: delayAt(0.8 * engine.revLimitRpm, Math.min(grid.mapKpa.at(-1)!, 100)),
    },
    priorScale: together.scale,
    levelSdPct: 100 * together.levelSd,
    coreVersion,
  }
}

/** Mean over the logs, each weighed by its evidence in the cell; logs without a value there have no say. */
function meanByEvidence(logs: readonly LogMemory[], of: (log: LogMemory) => Float64Array, n: number): Float64Array {
  const out = new Float64Array(n)
  for (let cell = 0; cell < n; cell += 1) {
    let sum = 0
    let weight = 0
    for (const log of logs) {
      const value = of(log)[cell]!
      if (!Number.isFinite(value) || log.evidenceS[cell]! === 0) continue
      sum += log.evidenceS[cell]! * value
      weight += log.evidenceS[cell]!
    }
    out[cell] = sum / weight
  }
  return out
}

/** The logs' paths, each weighed by its useful seconds. */
function meanPath(logs: readonly LogMemory[]): MixturePath {
  const total = logs.reduce((sum, log) => sum + log.masks.usedS, 0)
  const mean = (of: (path: MixturePath) => number) =>
    logs.reduce((sum, log) => sum + (log.masks.usedS / total) * of(log.nature.path), 0)
  return {
    t0S: mean((path) => path.t0S),
    massKg: mean((path) => path.massKg),
    lagS: mean((path) => path.lagS),
    filmShare: mean((path) => path.filmShare),
    filmTauS: mean((path) => path.filmTauS),
  }
}
