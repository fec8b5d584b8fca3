/** A replayed line in runs: it stops where a value is missing, and is never bridged. Pure. */
import type { Replay } from '../../../shared/contract/proposals.ts'

export interface ReplayPoint {
  readonly t: number
  readonly y: number
  /** 95 % of what the model knows; closed for what was measured. */
  readonly low: number
  readonly high: number
}

export function runsOf(replay: Replay, line: 'measured' | 'target' | 'predicted'): ReplayPoint[][] {
  const runs: ReplayPoint[][] = []
  let run: ReplayPoint[] = []
  const close = () => {
    if (run.length > 1) runs.push(run)
    run = []
  }
  replay.timeS.forEach((t, i) => {
    const value = replay[line][i] ?? null
    if (value === null) return close()
    const half = line === 'predicted' ? (1.96 * value * (replay.bandPct[i] ?? 0)) / 100 : 0
    run.push({ t, y: value, low: value - half, high: value + half })
  })
  close()
  return runs
}
