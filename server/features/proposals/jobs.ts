/** Learning in the background: frozen inputs in, a surface or a reason out; cancelled and stale work writes nothing. */
import { z } from 'zod'
import type { Proposal } from '../../../shared/contract/proposals.ts'
import { toWire } from '../../../shared/wire.ts'
import type { Learned } from '../../core/learn.ts'
import type { Deps } from '../../deps.ts'
import type { JobDefinition } from '../../platform/queue/run.ts'
import { factsOf, loadDrive } from '../logs/service.ts'
import { tableById } from '../tables/service.ts'
import { currentSheet } from '../vehicles/service.ts'
import * as store from './store.ts'

const Payload = z.object({ proposalId: z.string() })
const watchMs = 500

function surfaceOf(learned: Learned): NonNullable<Proposal['surface']> {
  return {
    grid: { rpm: [...learned.grid.rpm], mapKpa: [...learned.grid.mapKpa] },
    current: toWire(learned.current),
    proposed: toWire(learned.proposed),
    fitted: toWire(learned.fitted),
    evidenceS: toWire(learned.evidenceS),
    sigmaPct: toWire(learned.sigmaPct),
    misfitPct: toWire(learned.misfitPct),
    handNearest: toWire(learned.handNearest),
    handBilinear: toWire(learned.handBilinear),
    held: [...learned.held],
    leftOut: learned.leftOut.map(({ driveId, ...rest }) => ({ logId: driveId, ...rest })),
    delay: learned.delay,
  }
}

async function inputOf(deps: Deps, row: store.ProposalRow) {
  const base = await tableById(deps.db, row.baseRevisionId)
  const target = await tableById(deps.db, row.targetRevisionId)
  const sheet = await currentSheet(deps.db, row.vehicleId)
  if (!base || !target || !sheet) throw new Error(`the frozen inputs of proposal ${row.id} are gone`)
  const logs = await store.logsOf(deps.db, row.id)
  const drives = await Promise.all(logs.map((log) => loadDrive(deps, log.id, target)))
  const stepCapPct = Number(row.settings['stepCapPct'] ?? 20)
  return { drives, engine: factsOf(sheet), grid: base.grid, current: base.values, settings: { stepCapPct } }
}

async function learnProposal(deps: Deps, proposalId: string, signal: AbortSignal): Promise<void> {
  const row = await store.rowById(deps.db, proposalId)
  if (!row || (row.state !== 'queued' && row.state !== 'learning')) return
  const say = (patch: Partial<store.ProposalRow>) =>
    store.updateFrom(deps.db, proposalId, ['queued', 'learning'], patch)
  await say({ state: 'learning', step: 'Fetching the logs', progress: 0.05 })
  const input = await inputOf(deps, row)
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
    const result = await deps.crunch.learn(
      input,
      (step, done, total) => {
        latest = { step, progress: 0.1 + (0.85 * done) / total }
      },
      AbortSignal.any([signal, stop.signal]),
    )
    if (!result.ok) {
      const name =
        'driveId' in result
          ? (await store.logsOf(deps.db, proposalId)).find((log) => log.id === result.driveId)
          : undefined
      await say({
        state: 'refused',
        progress: 1,
        trouble: name ? `Log ${name.number}: ${result.detail}` : result.detail,
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
