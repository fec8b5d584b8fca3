/** What the learner is given: one drive as flat columns, and the facts of the engine. */
import type { Grid } from '../../shared/grid.ts'

/** One drive; all columns have the same length n, in these units; a missing reading is NaN. */
export interface Drive {
  readonly id: string
  /** Place in the vehicle's history: the table flashed in the earliest drive is what corrections are measured from. */
  readonly number?: number
  /** s, ascending. */
  readonly timeS: Float64Array
  /** 1/min. */
  readonly rpm: Float64Array
  /** kPa, absolute. */
  readonly mapKpa: Float64Array
  /** Measured, dimensionless. */
  readonly lambda: Float64Array
  readonly iatC?: Float64Array
  readonly ectC?: Float64Array
  readonly tpPct?: Float64Array
  /** Closed-loop fuel multiplier; 1 is none. */
  readonly trim?: Float64Array
  readonly warmup?: Float64Array
  readonly afterStart?: Float64Array
  readonly accel?: Float64Array
  readonly pulseWidthMs?: Float64Array
  readonly batteryV?: Float64Array
  readonly targetLambda?: Float64Array
  /** The table in the controller during this drive, VE in %. */
  readonly flashed: { readonly grid: Grid; readonly ve: Float64Array }
  /** The target table in force, lambda. */
  readonly target: { readonly grid: Grid; readonly lambda: Float64Array }
}

export interface EngineFacts {
  readonly displacementL: number
  readonly cylinders: number
  readonly boosted: boolean
  /** What the wideband can read. */
  readonly lambdaRange: { readonly low: number; readonly high: number }
  readonly revLimitRpm: number
  readonly stoichAfr: number
  /** One injection a cylinder and cycle; absent where the sheet does not know. */
  readonly injector?: { readonly mgPerMs: number; readonly deadTimeMs: number }
}
