/** Drives of the simulated flatbed, and a simulated log as the learner takes it. */
import { flatbed } from '../../sample-logs/simulator/demo.ts'
import { simulate, type SimulatedLog, type SimulationInput } from '../../sample-logs/simulator/simulate.ts'
import type { Drive } from '../../server/core/drive.ts'
import type { Grid } from '../../shared/grid.ts'

/** Warm, in the hills, five minutes at 20 Hz with the table it came with, unless said otherwise. */
export const flatbedLog = (seed: number, extra: Partial<SimulationInput> = {}): SimulatedLog =>
  simulate({
    engine: flatbed.engine,
    flashed: { grid: flatbed.grid, ve: flatbed.flashed },
    target: { grid: flatbed.grid, lambda: flatbed.target },
    habit: 'hills',
    seconds: 300,
    rateHz: 20,
    seed,
    startC: 80,
    ...extra,
  })

interface Tables {
  readonly grid: Grid
  readonly ve: Float64Array
  readonly target: Float64Array
}

export function driveOf(log: SimulatedLog, id: string, { grid, ve, target }: Tables): Drive {
  const column = (title: string) => Float64Array.from(log[title] ?? [])
  const multiplier = (title: string) => column(title).map((percent) => 1 + percent / 100)
  return {
    id,
    timeS: column('Time (s)'),
    rpm: column('Engine speed (rpm)'),
    mapKpa: column('MAP (kPa)'),
    lambda: column('Lambda'),
    iatC: column('IAT (°C)'),
    ectC: column('ECT (°C)'),
    tpPct: column('TP (%)'),
    trim: multiplier('Closed loop trim (%)'),
    warmup: multiplier('Warm-up (%)'),
    afterStart: multiplier('After-start (%)'),
    accel: multiplier('Acceleration (%)'),
    pulseWidthMs: column('Pulse width (ms)'),
    targetLambda: column('Target lambda'),
    flashed: { grid, ve },
    target: { grid, lambda: target },
  }
}
