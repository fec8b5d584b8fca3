/** Which samples cannot teach, and why; each sample is left out for the first reason that holds. */
import type { Grid } from '../../../shared/grid.ts'
import type { Drive, EngineFacts } from '../drive.ts'

export const maskNames = [
  'used',
  /** Rich of what the sensor can read: it says "at least this rich", and is used for that alone. */
  'richer than the sensor reads',
  'blank',
  'stopped',
  'cold',
  'fuel cut',
  'sensor at a limit',
  'sensor dropout',
  'sensor frozen',
  'outside the table',
  'after a gap',
] as const
export type MaskName = (typeof maskNames)[number]

export const maskIndex = (name: MaskName): number => maskNames.indexOf(name)
const [used, censored, fuelCut, atLimit, frozen] = (
  ['used', 'richer than the sensor reads', 'fuel cut', 'sensor at a limit', 'sensor frozen'] as const
).map(maskIndex) as [number, number, number, number, number]

/** A mixture burnt less than this after a cut still carries what the film gave up. */
export const settleAfterCutS = 0.6
const besideLeanLimitS = 0.25
const warmC = 60
/** Warm-up is logged by few controllers; without it nothing below this is evidence. */
const warmWithoutFactorC = 75
/** A reading this near a limit stands at it. */
const limitBand = 0.012
/** Beyond a limit by more than this nothing was measured at all. */
const dropoutBand = 0.06

/** Cut fuel: a pulse width of zero where it is logged, else a sensor on its lean limit with the engine turning. */
function isFuelCut(drive: Drive, i: number, high: number): boolean {
  const pulse = drive.pulseWidthMs?.[i]
  if (pulse !== undefined && Number.isFinite(pulse)) return pulse < 0.05
  return drive.lambda[i]! >= high - limitBand && (drive.tpPct?.[i] ?? 0) < 3 && drive.rpm[i]! > 1200
}

function isOutside(grid: Grid, rpm: number, map: number): boolean {
  return (
    rpm < grid.rpm[0]! - 80 ||
    rpm > grid.rpm.at(-1)! + 80 ||
    map < grid.mapKpa[0]! - 1.5 ||
    map > grid.mapKpa.at(-1)! + 1.5
  )
}

function maskOf(drive: Drive, engine: EngineFacts, grid: Grid, i: number): MaskName {
  const rpm = drive.rpm[i]!
  const map = drive.mapKpa[i]!
  const lambda = drive.lambda[i]!
  if (!Number.isFinite(rpm) || !Number.isFinite(map) || !Number.isFinite(lambda)) return 'blank'
  if (rpm < 300) return 'stopped'
  const { low, high } = engine.lambdaRange
  if (isFuelCut(drive, i, high)) return 'fuel cut'
  const ect = drive.ectC?.[i]
  if (ect !== undefined && ect < (drive.warmup ? warmC : warmWithoutFactorC)) return 'cold'
  if (lambda < low - dropoutBand || lambda > high + dropoutBand) return 'sensor dropout'
  if (lambda >= high - limitBand) return 'sensor at a limit'
  // The controller's table is clamped at its ends: what was injected out there says nothing of a cell.
  if (isOutside(grid, rpm, map) || isOutside(drive.flashed.grid, rpm, map)) return 'outside the table'
  return lambda <= low + limitBand ? 'richer than the sensor reads' : 'used'
}

/** A mask for every sample, as an index into `maskNames`. */
export function maskDrive(drive: Drive, engine: EngineFacts, grid: Grid, medianDtS: number): Uint8Array {
  const masks = new Uint8Array(drive.timeS.length)
  for (let i = 0; i < masks.length; i += 1) masks[i] = maskIndex(maskOf(drive, engine, grid, i))
  maskFrozen(drive.lambda, masks, medianDtS)
  maskBesideLeanLimit(drive.timeS, masks)
  return masks
}

/**
 * A sensor that stands still for half a second and far longer than it does otherwise has frozen. A coarse but living
 * reading repeats itself too; so the usual run decides what is far longer. Mutates `masks`.
 */
function maskFrozen(lambda: Float64Array, masks: Uint8Array, medianDtS: number): void {
  let runs = 0
  for (let i = 0; i < lambda.length; i += 1) if (i === 0 || lambda[i] !== lambda[i - 1]) runs += 1
  const usualRun = lambda.length / Math.max(1, runs)
  const least = Math.max(6, Math.ceil(0.5 / medianDtS), Math.ceil(8 * usualRun))
  for (let start = 0; start < lambda.length;) {
    let end = start + 1
    while (end < lambda.length && lambda[end] === lambda[start]) end += 1
    if (end - start >= least) for (let i = start; i < end; i += 1) if (masks[i] === used) masks[i] = frozen
    start = end
  }
}

/** On its way to the lean limit and back the sensor reads neither. Mutates `masks`. */
function maskBesideLeanLimit(timeS: Float64Array, masks: Uint8Array): void {
  const spoil = (from: number, step: number) => {
    for (let i = from + step; i >= 0 && i < masks.length; i += step) {
      if (Math.abs(timeS[i]! - timeS[from]!) > besideLeanLimitS || masks[i] === atLimit) return
      if (masks[i] === used || masks[i] === censored) masks[i] = 200
    }
  }
  for (let i = 0; i < masks.length; i += 1) {
    if (masks[i] !== atLimit) continue
    if (masks[i - 1] !== atLimit) spoil(i, -1)
    if (masks[i + 1] !== atLimit) spoil(i, 1)
  }
  for (let i = 0; i < masks.length; i += 1) if (masks[i] === 200) masks[i] = atLimit
}

export const roleOf = (mask: number): { isUsed: boolean; isCensored: boolean; isCut: boolean } => ({
  isUsed: mask === used,
  isCensored: mask === censored,
  isCut: mask === fuelCut,
})

/** Seconds a sample stands for: the step to the next one, at most one second. */
export const stepS = (timeS: Float64Array, i: number): number =>
  Math.max(0, Math.min(1, i + 1 < timeS.length ? timeS[i + 1]! - timeS[i]! : i > 0 ? timeS[i]! - timeS[i - 1]! : 0))

export interface MaskTotals {
  readonly totalS: number
  readonly usedS: number
  readonly leftOutS: Record<string, number>
}

export function totalsOf(seconds: Float64Array, masks: Uint8Array): MaskTotals {
  const each = new Float64Array(maskNames.length)
  for (let i = 0; i < masks.length; i += 1) each[masks[i]!]! += seconds[i]!
  const leftOutS: Record<string, number> = {}
  maskNames.forEach((name, i) => {
    if (i !== used && each[i]! > 0) leftOutS[name] = each[i]!
  })
  return { totalS: each.reduce((sum, value) => sum + value, 0), usedS: each[used]!, leftOutS }
}
