/** Looking closer at a proposal: the readings behind a cell, and a drive replayed with the table as decided so far. */
import type { z } from 'zod'
import type { CellSample, Proposal, Replay } from '../../../shared/contract/proposals.ts'
import { fromWire, toWire } from '../../../shared/wire.ts'
import type { Deps } from '../../deps.ts'
import type { Actor } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { loadDrive } from '../logs/service.ts'
import { frozenInputs } from './learning.ts'
import { openSurface, takenTable } from './service.ts'

/** A scatter with more points than this says no more. */
const mostSamples = 600

export async function readCellSamples(
  deps: Deps,
  actor: Actor,
  proposalId: string,
  cell: number,
): Promise<z.infer<typeof CellSample>[]> {
  const { row, surface, logs } = await openSurface(deps, actor, proposalId)
  if (cell >= surface.current.length) throw new Problem('not-found')
  const { ground, target } = await frozenInputs(deps, row)
  const used = logs.filter((log) => log.used)
  const each = await Promise.all(
    used.map(async (log) => {
      const found = await deps.crunch.samplesOfCell({
        drive: await loadDrive(deps, log.id, target),
        engine: ground.engine,
        grid: ground.grid,
        fitted: fromWire(surface.fitted),
        path: pathOf(surface, log.id),
        cell,
        most: Math.ceil(mostSamples / used.length),
      })
      return found.map((sample) => ({ logId: log.id, ...sample }))
    }),
  )
  return each.flat()
}

const pathOf = (surface: NonNullable<Proposal['surface']>, logId: string) =>
  surface.logs.find((log) => log.logId === logId)?.path ?? surface.path

export interface ReplayQuery {
  readonly logId: string
  readonly table: 'decided' | 'current' | 'proposed'
  readonly fromS: number
  readonly toS: number
  readonly points: number
}

export async function replayForProposal(
  deps: Deps,
  actor: Actor,
  proposalId: string,
  query: ReplayQuery,
): Promise<Replay> {
  const { row, surface, logs } = await openSurface(deps, actor, proposalId)
  if (!logs.some((log) => log.id === query.logId)) throw new Problem('not-found')
  const { ground, target } = await frozenInputs(deps, row)
  const table = query.table === 'decided' ? takenTable(row, surface) : fromWire(surface[query.table])
  const noise = surface.logs.find((log) => log.logId === query.logId)?.noisePct
  const whole = await deps.crunch.replayDrive({
    drive: await loadDrive(deps, query.logId, target),
    engine: ground.engine,
    grid: ground.grid,
    fitted: fromWire(surface.fitted),
    sigmaPct: fromWire(surface.sigmaPct),
    path: pathOf(surface, query.logId),
    noisePct: noise ?? 1,
    table,
  })
  const chosen: number[] = []
  for (let i = 0; i < whole.timeS.length; i += 1)
    if (whole.timeS[i]! >= query.fromS && whole.timeS[i]! <= query.toS) chosen.push(i)
  const every = Math.max(1, Math.ceil(chosen.length / query.points))
  const kept = chosen.filter((_, i) => i % every === 0)
  const pick = (values: Float64Array) => kept.map((i) => values[i]!)
  return {
    timeS: pick(whole.timeS),
    measured: toWire(pick(whole.measured)),
    target: toWire(pick(whole.target)),
    explained: toWire(pick(whole.explained)),
    predicted: toWire(pick(whole.predicted)),
    bandPct: toWire(pick(whole.bandPct)),
    onTarget: whole.onTarget,
  }
}
