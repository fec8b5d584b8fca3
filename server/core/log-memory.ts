/** What is remembered of one log: all that a proposal needs of it, so that logs are added and left out without their samples. */
import { cellCount, valueAt, type Grid } from '../../shared/grid.ts'
import type { Drive, EngineFacts } from './drive.ts'
import { handSums, type HandSums } from './evidence/hand.ts'
import { maskIndex, totalsOf, type MaskTotals } from './evidence/masks.ts'
import { refusalOf, type LearnRefusal } from './evidence/refuse.ts'
import type { QuadraticForm } from './fit/drift.ts'
import { fitLog, retakeForm, type LogFit, type LogNature } from './fit/log-fit.ts'
import type { PriorParts } from './fit/prior.ts'
import { prepare, Role, type Prepared } from './model/prepare.ts'

/** n cells each unless said otherwise. Plain numbers and typed arrays only: it is stored as it is. */
export interface LogMemory {
  readonly driveId: string
  readonly number: number
  readonly nature: LogNature
  readonly form: QuadraticForm
  /** ln VE the form was taken at. */
  readonly at: Float64Array
  /** ln of the table flashed in this drive, on the grid. */
  readonly base: Float64Array
  readonly evidenceS: Float64Array
  /** Seconds in which the reading was richer than the sensor can tell. */
  readonly censoredS: Float64Array
  /** Separate visits of at least a quarter of a second. */
  readonly visits: Int32Array
  /** Residual, ln, times evidence seconds: what the fit of this log could not explain. */
  readonly misfitSum: Float64Array
  readonly handNearest: HandSums
  readonly handBilinear: HandSums
  readonly masks: MaskTotals
  /** Mean of 1 / air mass flow, s/kg, and of 1 / air of one filling, 1/mg, weighted by evidence. */
  readonly inverseFlow: Float64Array
  readonly inverseFilling: Float64Array
  /**
   * ln of fuel by pulse width and injector data over fuel by table and corrections, mean weighted by evidence; NaN where
   * no pulse width or no intake temperature is logged.
   */
  readonly routeGap: Float64Array
}

export type Remembered = { readonly ok: true; readonly memory: LogMemory } | LearnRefusal

/** ln of a drive's flashed table at the nodes of the grid. */
export function flashedOn(drive: Drive, grid: Grid): Float64Array {
  const out = new Float64Array(cellCount(grid))
  grid.mapKpa.forEach((map, row) =>
    grid.rpm.forEach((rpm, col) => {
      out[row * grid.rpm.length + col] = Math.log(valueAt(drive.flashed.grid, drive.flashed.ve, rpm, map))
    }),
  )
  return out
}

/** Learns one log by itself. Deterministic: the same drive, engine and grid give the same bits. */
export function rememberLog(
  drive: Drive,
  engine: EngineFacts,
  grid: Grid,
  parts: PriorParts,
  report?: (done: number, total: number) => void,
): Remembered {
  const prepared = prepare(drive, engine, grid)
  const refusal = refusalOf(drive, totalsOf(prepared.seconds, prepared.mask))
  if (refusal) return refusal
  const base = flashedOn(drive, grid)
  const fit = fitLog(prepared, engine.stoichAfr, parts, base, report)
  return {
    ok: true,
    memory: {
      driveId: drive.id,
      number: drive.number ?? 0,
      base,
      ...formOf(fit),
      ...factsOf(prepared, drive, engine, fit),
    },
  }
}

const formOf = ({ nature, form, at }: LogFit) => ({ nature, form, at })

/** The same log linearised at another surface, with its path, drift size and noise kept. @param x ln VE, n. */
export function relinearise(
  memory: LogMemory,
  drive: Drive,
  engine: EngineFacts,
  grid: Grid,
  x: Float64Array,
): LogMemory {
  const prepared = prepare(drive, engine, grid)
  const fit = retakeForm(prepared, engine.stoichAfr, x, memory.nature)
  return { ...memory, ...formOf(fit), ...factsOf(prepared, drive, engine, fit) }
}

/** What each cell collects over the samples; n cells each. */
const emptyTally = (n: number) => ({
  evidenceS: new Float64Array(n),
  censoredS: new Float64Array(n),
  misfitSum: new Float64Array(n),
  inverseFlow: new Float64Array(n),
  inverseFilling: new Float64Array(n),
  gap: new Float64Array(n),
  gapS: new Float64Array(n),
})
type Tally = ReturnType<typeof emptyTally>

function factsOf(prepared: Prepared, drive: Drive, engine: EngineFacts, fit: LogFit) {
  const tally = emptyTally(prepared.cellCount)
  const mask = prepared.mask.slice()
  for (let i = 0; i < prepared.n; i += 1) {
    if (prepared.role[i] === Role.silent) continue
    if (fit.prediction.clear[i] === 0) mask[i] = maskIndex(prepared.sinceCutS[i]! < 3 ? 'fuel cut' : 'after a gap')
    else count(tally, prepared, drive, engine, fit, i)
  }
  const mean = (sum: Float64Array, weight: Float64Array) => sum.map((value, cell) => value / weight[cell]!)
  return {
    evidenceS: tally.evidenceS,
    censoredS: tally.censoredS,
    misfitSum: tally.misfitSum,
    inverseFlow: mean(tally.inverseFlow, tally.evidenceS),
    inverseFilling: mean(tally.inverseFilling, tally.evidenceS),
    routeGap: mean(tally.gap, tally.gapS),
    visits: visitsOf(prepared, fit),
    handNearest: handSums(prepared, true),
    handBilinear: handSums(prepared, false),
    masks: totalsOf(prepared.seconds, mask),
  }
}

/** Adds one reading to the cells its mixture was burnt in. Mutates `tally`. */
function count(tally: Tally, prepared: Prepared, drive: Drive, engine: EngineFacts, fit: LogFit, i: number): void {
  const { cells, weights, seconds, airPerVe } = prepared
  const from = fit.prediction.source[i]!
  const gap = routeGapAt(prepared, drive, engine, from)
  for (let k = 4 * from; k < 4 * from + 4; k += 1) {
    const cell = cells[k]!
    const share = weights[k]! ** 2 * seconds[i]!
    if (share === 0) continue
    if (prepared.role[i] === Role.censored) {
      tally.censoredS[cell]! += share
      continue
    }
    const flow = airPerVe[from]! * Math.exp(fit.at[cell]!)
    tally.evidenceS[cell]! += share
    tally.misfitSum[cell]! += share * fit.residual[i]!
    tally.inverseFlow[cell]! += share / flow
    tally.inverseFilling[cell]! += share / fillingMg(flow, drive.rpm[from]!, engine.cylinders)
    if (Number.isFinite(gap)) {
      tally.gap[cell]! += share * gap
      tally.gapS[cell]! += share
    }
  }
}

/** Air of one cylinder and cycle, mg. */
const fillingMg = (flowKgS: number, rpm: number, cylinders: number): number => (1e6 * flowKgS * 120) / (rpm * cylinders)

/** ln of the fuel that the pulse width delivers over the fuel that table and corrections ask for. */
function routeGapAt(
  prepared: Prepared,
  drive: Drive,
  { injector, cylinders, stoichAfr }: EngineFacts,
  i: number,
): number {
  const pulse = drive.pulseWidthMs?.[i]
  // By pulse width the charge must be known; the controller's own table divides its temperature out.
  if (!injector || pulse === undefined || !drive.iatC || prepared.asked[i] === 0) return Number.NaN
  const fuelMg = (pulse - injector.deadTimeMs) * injector.mgPerMs
  const airMg = fillingMg(prepared.airPerVe[i]! * prepared.asked[i]!, drive.rpm[i]!, cylinders)
  return Math.log((fuelMg * stoichAfr) / airMg)
}

const leastVisitS = 0.25
/** A pause longer than this between two samples in a cell makes two visits. */
const visitPauseS = 2

/** Separate visits of each cell: one visit is one opinion. */
function visitsOf(prepared: Prepared, { prediction }: LogFit): Int32Array {
  const { n, cellCount: count, cells, weights, seconds, timeS, role } = prepared
  const visits = new Int32Array(count)
  const visitS = new Float64Array(count)
  const lastS = new Float64Array(count).fill(-Infinity)
  for (let i = 0; i < n; i += 1) {
    if (role[i] !== Role.speaks || prediction.clear[i] === 0) continue
    const from = prediction.source[i]!
    for (let k = 4 * from; k < 4 * from + 4; k += 1) {
      if (weights[k]! < 0.25) continue
      const cell = cells[k]!
      if (timeS[i]! - lastS[cell]! > visitPauseS) visitS[cell] = 0
      lastS[cell] = timeS[i]!
      const before = visitS[cell]!
      visitS[cell] = before + seconds[i]!
      if (before < leastVisitS && visitS[cell]! >= leastVisitS) visits[cell]! += 1
    }
  }
  return visits
}
