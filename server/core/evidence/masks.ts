/** Which samples cannot teach, and why; each sample is left out for the first reason that holds. */
import type { Grid } from '../../../shared/grid.ts'
import type { Drive, EngineFacts } from '../drive.ts'

export const maskNames = [
  'used',
  'blank',
  'stopped',
  'cold',
  'fuel cut',
  'sensor at a limit',
  'sensor dropout',
  'outside the table',
] as const
export type MaskName = (typeof maskNames)[number]

const used = 0
const settleAfterCutS = 0.6
const warmC = 60
/** Warm-up is logged by few controllers; without it nothing below this is evidence. */
const warmWithoutFactorC = 75

/** Cut fuel: a pulse width of zero where it is logged, else a sensor on its lean limit with the engine turning. */
function isFuelCut(drive: Drive, i: number, high: number): boolean {
  const pulse = drive.pulseWidthMs?.[i]
  if (pulse !== undefined && Number.isFinite(pulse)) return pulse < 0.05
  return drive.lambda[i]! >= high - 0.012 && (drive.tpPct?.[i] ?? 0) < 3 && drive.rpm[i]! > 1200
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
  if (lambda < low - 0.06 || lambda > high + 0.06) return 'sensor dropout'
  if (lambda >= high - 0.012 || lambda <= low + 0.012) return 'sensor at a limit'
  const outside =
    rpm < grid.rpm[0]! - 80 ||
    rpm > grid.rpm.at(-1)! + 80 ||
    map < grid.mapKpa[0]! - 1.5 ||
    map > grid.mapKpa.at(-1)! + 1.5
  return outside ? 'outside the table' : 'used'
}

/** A mask for every sample, as an index into `maskNames`. The time after a fuel cut counts as fuel cut. */
export function maskDrive(drive: Drive, engine: EngineFacts, grid: Grid): Uint8Array {
  const n = drive.timeS.length
  const masks = new Uint8Array(n)
  let cutUntil = -Infinity
  for (let i = 0; i < n; i += 1) {
    const name = maskOf(drive, engine, grid, i)
    if (name === 'fuel cut') cutUntil = drive.timeS[i]! + settleAfterCutS
    const settled = name !== 'used' || drive.timeS[i]! > cutUntil
    masks[i] = maskNames.indexOf(settled ? name : 'fuel cut')
  }
  return masks
}

export const isUsed = (mask: number): boolean => mask === used

/** Seconds a sample stands for: the step to the next one, at most one second. */
export const stepS = (timeS: Float64Array, i: number): number =>
  Math.min(1, i + 1 < timeS.length ? timeS[i + 1]! - timeS[i]! : i > 0 ? timeS[i]! - timeS[i - 1]! : 0)

export interface MaskTotals {
  readonly totalS: number
  readonly usedS: number
  readonly leftOutS: Record<string, number>
}

export function totalsOf(timeS: Float64Array, masks: Uint8Array): MaskTotals {
  const seconds = new Float64Array(maskNames.length)
  for (let i = 0; i < masks.length; i += 1) seconds[masks[i]!]! += stepS(timeS, i)
  const leftOutS: Record<string, number> = {}
  maskNames.forEach((name, i) => {
    if (i !== used && seconds[i]! > 0) leftOutS[name] = seconds[i]!
  })
  return { totalS: seconds.reduce((sum, each) => sum + each, 0), usedS: seconds[used]!, leftOutS }
}
