/** The one door of the learner: logs, engine and the present table in; a proposal with its uncertainty out. */
import type { Drive } from './drive.ts'
import type { LearnRefusal } from './evidence/refuse.ts'
import { contradictions } from './fit/contradict.ts'
import { usualLevelSd } from './fit/log-fit.ts'
import { priorOf, priorParts, type PriorParts } from './fit/prior.ts'
import { choosePrior, gather, solveSystem } from './fit/system.ts'
import { relinearise, rememberLog, type LogMemory } from './log-memory.ts'
import { propose, type Ground, type Learned, type Together } from './propose.ts'

export { coreVersion, type Ground, type Learned } from './propose.ts'

export interface LearnInput extends Ground {
  readonly drives: readonly Drive[]
}

/** Called as work goes on: what is done, how many of how many. */
export type LearnProgress = (step: string, done: number, total: number) => void

export type LearnResult = { readonly ok: true; readonly proposal: Learned } | LearnRefusal

/** A solution further than this from a log's linearisation is not that log's any more, %. */
const farLimitPct = 5

/** Learns the VE surface. Deterministic: the same input gives the same bits, in whatever order the logs come. */
export function learn(input: LearnInput, progress: LearnProgress = () => undefined): LearnResult {
  const { drives, engine, grid } = input
  const parts = priorParts(grid)
  const memories: LogMemory[] = []
  for (const [i, drive] of drives.entries()) {
    const remembered = rememberLog(drive, engine, grid, parts, (done, total) =>
      progress('Learning each log', i * total + done, drives.length * total),
    )
    if (!remembered.ok) return remembered
    memories.push(remembered.memory)
  }
  let result = learnFrom(memories, input, parts)
  for (let round = 0; round < settleRounds && result.ok; round += 1) {
    const far = farLogs(result.proposal)
    if (far.length === 0) break
    const x = result.proposal.fitted.map(Math.log)
    for (const [i, drive] of drives.entries())
      if (far.includes(drive.id)) memories[i] = relinearise(memories[i]!, drive, engine, grid, x)
    result = learnFrom(memories, input, parts)
  }
  return result
}

/** How often logs are taken again where the sum of all ended far from them; in practice once is enough. */
export const settleRounds = 2

/** Logs that must be linearised again at the solution, by drive id. */
export const farLogs = (proposal: Learned): string[] =>
  proposal.logs.filter((log) => log.farPct > farLimitPct).map((log) => log.driveId)

const notSolvable: LearnRefusal = {
  ok: false,
  reason: 'not-solvable',
  detail: 'The table could not be fitted: the equations have no single answer.',
}

/** A proposal from what is remembered of the logs: a sum and a few factorisations, no samples. O(cells³). */
export function learnFrom(unordered: readonly LogMemory[], ground: Ground, parts: PriorParts): LearnResult {
  // One order for all callers: floating-point sums depend on it.
  const logs = unordered.toSorted((a, b) => a.number - b.number || (a.driveId < b.driveId ? -1 : 1))
  const base = logs[0]?.base
  if (!base) return notSolvable
  const found = solveTogether(logs, base, parts)
  if (!found) return notSolvable
  return { ok: true, proposal: propose(logs, ground, found) }
}

const levelSds = [0.003, 0.005, 0.008, 0.013, 0.02, 0.03]

/**
 * Prior by evidence; from three logs on also how much drives differ in level. One after the other: the two hardly know of
 * each other, and together they would cost six times as much.
 */
function solveTogether(logs: readonly LogMemory[], base: Float64Array, parts: PriorParts): Together | null {
  let gathered = gather(logs, base, usualLevelSd)
  const chosen = choosePrior(parts, base, gathered)
  if (!chosen) return null
  const { scale } = chosen
  let levelSd = usualLevelSd
  let { solution } = chosen
  if (logs.length >= 3) {
    const prior = priorOf(parts, base, scale)
    let best = -Infinity
    for (const candidate of levelSds) {
      gathered = gather(logs, base, candidate)
      const found = solveSystem(gathered, prior)
      const score = (found?.lnEvidence ?? -Infinity) - (Math.log(candidate / usualLevelSd) / 0.8) ** 2 / 2
      if (!found || score <= best) continue
      best = score
      levelSd = candidate
      solution = found
    }
  }
  // With the usual spread of levels: the one just found may have been widened by the very log that disagrees.
  return { scale, solution, levelSd, disagreement: contradictions(logs, base, parts, scale, usualLevelSd) }
}
