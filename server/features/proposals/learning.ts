/** From frozen inputs to a surface: each log is learned once and remembered, then logs add up. */
import { createHash } from 'node:crypto'
import { eq } from 'drizzle-orm'
import type { Proposal } from '../../../shared/contract/proposals.ts'
import { toWire } from '../../../shared/wire.ts'
import type { Drive } from '../../core/drive.ts'
import type { LearnRefusal } from '../../core/evidence/refuse.ts'
import { coreVersion, farLogs, settleRounds, type Ground, type Learned, type LearnResult } from '../../core/learn.ts'
import type { Deps } from '../../deps.ts'
import { logMemories } from '../../platform/db/schema/proposals.ts'
import { factsOf, loadDrive, readingOf } from '../logs/service.ts'
import { tableById, type Table } from '../tables/service.ts'
import { sheetNumbered } from '../vehicles/service.ts'
import type { ProposalRow } from './store.ts'

/** What a proposal was asked for on; nothing of it changes afterwards. */
export interface Frozen {
  readonly ground: Ground
  readonly target: Table
}

export async function frozenInputs(deps: Pick<Deps, 'db'>, row: ProposalRow): Promise<Frozen> {
  const base = await tableById(deps.db, row.baseRevisionId)
  const target = await tableById(deps.db, row.targetRevisionId)
  const sheet = await sheetNumbered(deps.db, row.vehicleId, Number(row.settings['engineSheet']))
  if (!base || !target || !sheet) throw new Error(`the frozen inputs of proposal ${row.id} are gone`)
  return {
    target,
    ground: {
      grid: base.grid,
      current: base.values,
      engine: factsOf(sheet),
      settings: { stepCapPct: Number(row.settings['stepCapPct'] ?? 20) },
    },
  }
}

/** All that a log's memory depends on; the same key means the same bits. */
async function keyOf(deps: Deps, logId: string, { ground, target }: Frozen): Promise<string> {
  const { grid, engine } = ground
  const parts = [coreVersion, await readingOf(deps.db, logId), target.checksum, grid, engine]
  return createHash('sha256').update(JSON.stringify(parts)).digest('hex')
}

export interface Watch {
  readonly signal: AbortSignal
  readonly progress: (step: string, done: number, total: number) => void
}
export const unwatched = (): Watch => ({ signal: new AbortController().signal, progress: () => undefined })

/** Takes the log's memory from the database, or learns it and puts it there. */
async function memoryOf(
  deps: Deps,
  logId: string,
  frozen: Frozen,
  drive: () => Promise<Drive>,
  signal: AbortSignal,
  report: (done: number, total: number) => void,
): Promise<{ ok: true; memory: Uint8Array } | LearnRefusal> {
  const key = await keyOf(deps, logId, frozen)
  const [kept] = await deps.db.select().from(logMemories).where(eq(logMemories.logId, logId))
  if (kept?.key === key) return { ok: true, memory: kept.memory }
  const { grid, engine } = frozen.ground
  const found = await deps.crunch.rememberDrive({ drive: await drive(), grid, engine }, report, signal)
  if (!found.ok) return found
  const { memory } = found
  await deps.db
    .insert(logMemories)
    .values({ logId, key, memory })
    .onConflictDoUpdate({ target: logMemories.logId, set: { key, memory, createdAt: deps.clock.now() } })
  return found
}

/** Adds the logs up; one whose sum ended far from where it was linearised is taken again there. */
export async function learnLogs(
  deps: Deps,
  frozen: Frozen,
  logIds: readonly string[],
  { signal, progress }: Watch,
): Promise<LearnResult> {
  const { ground, target } = frozen
  const driveOf = (logId: string) => loadDrive(deps, logId, target)
  const memories: Uint8Array[] = []
  for (const [i, logId] of logIds.entries()) {
    const found = await memoryOf(
      deps,
      logId,
      frozen,
      () => driveOf(logId),
      signal,
      (done, total) => progress('Learning each log', i * total + done, logIds.length * total),
    )
    if (!found.ok) return found
    memories.push(found.memory)
  }
  progress('Adding the logs up', 1, 1)
  let result = await deps.crunch.addUpLogs(memories, ground)
  for (let round = 0; round < settleRounds && result.ok; round += 1) {
    const far = farLogs(result.proposal)
    if (far.length === 0) break
    const x = result.proposal.fitted.map(Math.log)
    for (const [i, logId] of logIds.entries()) {
      if (!far.includes(logId)) continue
      const { grid, engine } = ground
      memories[i] = await deps.crunch.relineariseDrive({
        memory: memories[i]!,
        drive: await driveOf(logId),
        grid,
        engine,
        x,
      })
    }
    result = await deps.crunch.addUpLogs(memories, ground)
  }
  return result
}

export function surfaceOf(learned: Learned): NonNullable<Proposal['surface']> {
  return {
    grid: { rpm: [...learned.grid.rpm], mapKpa: [...learned.grid.mapKpa] },
    current: toWire(learned.current),
    proposed: toWire(learned.proposed),
    fitted: toWire(learned.fitted),
    evidenceS: toWire(learned.evidenceS),
    sigmaPct: toWire(learned.sigmaPct),
    misfitPct: toWire(learned.misfitPct),
    visits: toWire(learned.visits),
    handNearest: toWire(learned.handNearest),
    handBilinear: toWire(learned.handBilinear),
    byPulse: toWire(learned.byPulse),
    held: [...learned.held],
    diagnoses: [...learned.diagnoses],
    logs: learned.logs.map((log) => ({
      logId: log.driveId,
      totalS: log.totalS,
      usedS: log.usedS,
      leftOutS: log.leftOutS,
      path: log.path,
      noisePct: log.noisePct,
      driftPct: log.driftPct,
      disagreement: Number.isFinite(log.disagreement) ? log.disagreement : null,
      evidenceS: toWire(log.evidenceS.map((seconds) => Math.round(seconds * 100) / 100)),
    })),
    path: learned.path,
    delay: learned.delay,
  }
}
