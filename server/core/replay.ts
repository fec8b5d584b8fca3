/** What a drive would have read with another table: the learned surface is the engine, the table is what was injected. */
import { valueAt, type Grid } from '../../shared/grid.ts'
import type { Drive, EngineFacts } from './drive.ts'
import { burnWith, emptyPrediction, predictInto } from './model/forward.ts'
import type { MixturePath } from './model/path.ts'
import { prepare, Role, targetAt, type Prepared } from './model/prepare.ts'

export interface ReplayInput {
  readonly drive: Drive
  readonly engine: EngineFacts
  readonly grid: Grid
  /** The engine as learned: VE in %, and its standard deviation in %, on the grid. */
  readonly fitted: Float64Array
  readonly sigmaPct: Float64Array
  readonly path: MixturePath
  /** The table to try, VE in %, on the grid. */
  readonly table: Float64Array
  /** Robust standard deviation of a reading, %. */
  readonly noisePct: number
}

/** All columns as long as the drive; NaN where the model has no say. */
export interface Replay {
  readonly timeS: Float64Array
  readonly measured: Float64Array
  readonly target: Float64Array
  /** What the model says of the drive as it was: laid over `measured` it shows how well delay, film and table are known. */
  readonly explained: Float64Array
  /** Lambda with the table tried, closed loop off. */
  readonly predicted: Float64Array
  /** One standard deviation of `predicted`, %: the table's where the engine ran, and a reading's. */
  readonly bandPct: Float64Array
  /** Share of the time that can be judged within 3 % of target: measured, and with the table tried. */
  readonly onTarget: { readonly measured: number; readonly predicted: number; readonly seconds: number }
}

/** Lambda within this of its target is on target. */
export const onTargetPct = 3

/** O(samples). */
export function replay(input: ReplayInput): Replay {
  const { drive, engine, grid, fitted } = input
  const prepared = prepare(drive, engine, grid)
  const burn = burnWith(prepared, fitted, engine.stoichAfr)
  const explained = predictInto(emptyPrediction(prepared.n), prepared, burn, input.path)
  const asTried = withTable(prepared, drive, grid, input.table)
  const tried = predictInto(
    emptyPrediction(prepared.n),
    asTried,
    burnWith(asTried, fitted, engine.stoichAfr),
    input.path,
  )
  const target = targetAtSensor(drive, explained.source)
  const out = {
    timeS: drive.timeS,
    measured: drive.lambda,
    target,
    explained: explained.lnPhi.map((value, i) => (explained.clear[i] ? Math.exp(-value) : Number.NaN)),
    predicted: tried.lnPhi.map((value, i) => (tried.clear[i] ? Math.exp(-value) : Number.NaN)),
    bandPct: bandOf(prepared, explained.source, input),
  }
  return { ...out, onTarget: shareOnTarget(prepared, out) }
}

/** Fuel asked for with another table in the controller; the closed loop would have answered it, so its trim is taken out. */
function withTable(prepared: Prepared, drive: Drive, grid: Grid, table: Float64Array): Prepared {
  const asked = prepared.asked.map((before, i) => {
    if (before === 0) return 0
    const flashed = valueAt(drive.flashed.grid, drive.flashed.ve, drive.rpm[i]!, drive.mapKpa[i]!)
    const trim = drive.trim?.[i]
    const open = trim !== undefined && trim > 0 ? 1 / trim : 1
    const asked = before * open * (valueAt(grid, table, drive.rpm[i]!, drive.mapKpa[i]!) / flashed)
    return Number.isFinite(asked) ? asked : before
  })
  return { ...prepared, asked }
}

/** Target lambda of the mixture each reading speaks of: what was asked for when it was burnt. */
function targetAtSensor(drive: Drive, source: Int32Array): Float64Array {
  return Float64Array.from(source, (from) => targetAt(drive, from))
}

/**
 * One standard deviation of the prediction, %: the cells' as if they erred together, which is never too narrow, and a
 * reading's.
 */
function bandOf({ cells, weights }: Prepared, source: Int32Array, { sigmaPct, noisePct }: ReplayInput): Float64Array {
  return Float64Array.from(source, (from) => {
    let sigma = 0
    for (let k = 4 * from; k < 4 * from + 4; k += 1) sigma += weights[k]! * sigmaPct[cells[k]!]!
    return Math.hypot(sigma, noisePct)
  })
}

function shareOnTarget(
  { role, seconds, n }: Prepared,
  { measured, predicted, target }: Pick<Replay, 'measured' | 'predicted' | 'target'>,
): Replay['onTarget'] {
  let total = 0
  let before = 0
  let after = 0
  const isOn = (lambda: number, wanted: number) => Math.abs(100 * Math.log(lambda / wanted)) <= onTargetPct
  for (let i = 0; i < n; i += 1) {
    if (role[i] === Role.silent || !Number.isFinite(predicted[i])) continue
    total += seconds[i]!
    if (isOn(measured[i]!, target[i]!)) before += seconds[i]!
    if (isOn(predicted[i]!, target[i]!)) after += seconds[i]!
  }
  return { seconds: total, measured: total > 0 ? before / total : 0, predicted: total > 0 ? after / total : 0 }
}
