/** Learning in the background: frozen inputs in, a surface or a reason out; cancelled and stale work writes nothing. */
import { z } from 'zod'
import type { Deps } from '../../deps.ts'
import type { JobDefinition } from '../../platform/queue/run.ts'
import { frozenInputs, learnLogs, surfaceOf } from './learning.ts'
import * as store from './store.ts'

const Payload = z.object({ proposalId: z.string() })
const watchMs = 500

async function learnProposal(deps: Deps, proposalId: string, signal: AbortSignal): Promise<void> {
  const row = await store.rowById(deps.db, proposalId)
  if (!row || (row.state !== 'queued' && row.state !== 'learning')) return
  const say = (patch: Partial<store.ProposalRow>) =>
    store.updateFrom(deps.db, proposalId, ['queued', 'learning'], patch)
  await say({ state: 'learning', step: 'Fetching the logs', progress: 0.05 })
  const frozen = await frozenInputs(deps, row)
  const logs = await store.logsOf(deps.db, row.id)
  // A person may cancel while the thread works: the state is looked at, and the thread ended when it changed.
  const stop = new AbortController()
  let latest: { step: string; progress: number } | null = null
  const watch = setInterval(() => {
    const patch = latest ?? {}
    latest = null
    void (
      Object.keys(patch).length > 0
        ? say(patch)
        : store.rowById(deps.db, proposalId).then((now) => now?.state === 'learning')
    )
      .then((alive) => alive || stop.abort())
      .catch(() => undefined)
  }, watchMs)
  try {
    const result = await learnLogs(
      deps,
      frozen,
      logs.map((log) => log.id),
      {
        signal: AbortSignal.any([signal, stop.signal]),
        progress: (step, done, total) => {
          latest = { step, progress: 0.1 + (0.85 * done) / total }
        },
      },
    )
    if (!result.ok) {
      const named = logs.find((log) => log.id === result.driveId)
      await say({
        state: 'refused',
        progress: 1,
        trouble: named ? `Log ${named.number}: ${result.detail}` : result.detail,
      })
      return
    }
    const surface = surfaceOf(result.proposal)
    await say({
      state: 'open',
      progress: 1,
      step: '',
      surface,
      // Where no log has been there is nothing to decide: the cell keeps its value.
      decisions: surface.evidenceS.map((seconds) => ((seconds ?? 0) > 0 ? 'open' : 'kept')),
      byHand: surface.current.map(() => null),
      learnedAt: deps.clock.now(),
    })
  } finally {
    clearInterval(watch)
  }
}

export const proposalJobs: readonly JobDefinition[] = [
  {
    name: 'proposal.learn',
    async handle(deps, payload, signal) {
      const { proposalId } = Payload.parse(payload)
      try {
        await learnProposal(deps, proposalId, signal)
      } catch (error) {
        const now = await store.rowById(deps.db, proposalId)
        if (now?.state === 'cancelled') return
        if (!signal.aborted) {
          deps.log.error({ err: error, proposalId }, 'learning stopped with a fault')
          const words = error instanceof Error ? error.message : 'unknown'
          await store.updateFrom(deps.db, proposalId, ['queued', 'learning'], {
            state: 'failed',
            trouble: `Learning stopped: ${words}`,
          })
          return
        }
        throw error
      }
    },
  },
]
