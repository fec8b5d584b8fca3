/** Switching a proposal's logs on and off. */
import type { Proposal } from '../../../shared/contract/proposals.ts'
import type { CellDecision } from '../../../shared/lifecycle.ts'
import { coreVersion } from '../../core/learn.ts'
import type { Deps } from '../../deps.ts'
import { recordAudit } from '../../platform/audit/record.ts'
import type { Actor } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { frozenInputs, learnLogs, surfaceOf, unwatched } from './learning.ts'
import { decidedMeanwhile, getProposal, openProposal } from './service.ts'
import * as store from './store.ts'

/**
 * Switches logs on or off: remembered logs are added up afresh, so that switching back restores every bit. Decisions
 * stay; a cell that lost its evidence keeps its value, one that gained some is open.
 */
export async function chooseLogs(
  deps: Deps,
  actor: Actor,
  proposalId: string,
  input: { version: number; logIds: string[] },
): Promise<Proposal> {
  const { row } = await openProposal(deps.db, actor, proposalId)
  const all = await store.logsOf(deps.db, proposalId)
  const chosen = all.filter((log) => input.logIds.includes(log.id))
  if (chosen.length !== new Set(input.logIds).size) throw new Problem('not-found')
  const learned = await learnLogs(
    deps,
    await frozenInputs(deps, row),
    chosen.map((log) => log.id),
    unwatched(),
  )
  if (!learned.ok) throw new Problem('input-invalid', { detail: learned.detail })
  const surface = surfaceOf(learned.proposal)
  return deps.db.transaction(async (tx) => {
    const before = row.surface
    const decisions = row.decisions.map((decision, cell): CellDecision => {
      const had = (before?.evidenceS[cell] ?? 0) > 0
      const has = (surface.evidenceS[cell] ?? 0) > 0
      if (had && !has && (decision === 'accepted' || decision === 'open')) return 'kept'
      return !had && has && decision === 'kept' ? 'open' : decision
    })
    const stored = await store.updateVersion(tx, proposalId, input.version, {
      surface,
      decisions,
      settings: { ...row.settings, logs: chosen.map((log) => log.sha256) },
      coreVersion,
    })
    if (!stored) throw new Problem('changed-meanwhile', { detail: decidedMeanwhile })
    await store.useLogs(tx, proposalId, input.logIds)
    await recordAudit(tx, actor, {
      action: 'proposal.logs',
      subject: `Proposal ${row.number}, ${chosen.length} of ${all.length} logs`,
      vehicleId: row.vehicleId,
      facts: { proposalId, logs: chosen.map((log) => log.sha256) },
    })
    return getProposal(tx, actor, proposalId)
  })
}
