/** Binds the proposals endpoints; no logic. */
import * as contract from '../../../shared/contract/proposals.ts'
import type { Deps } from '../../deps.ts'
import { on, type Binder } from '../../platform/http/on.ts'
import * as carrying from './carry-over.ts'
import { chooseLogs } from './choose-logs.ts'
import * as inspect from './inspect.ts'
import * as proposals from './service.ts'

export function mountProposals(binder: Binder, deps: Deps): void {
  on(
    binder,
    contract.requestProposal,
  )(({ actor, params, body }) => proposals.requestProposal(deps, actor, params.vehicleId, body))
  on(
    binder,
    contract.listProposals,
  )(async ({ actor, params }) => ({
    proposals: await proposals.listProposals(deps, actor, params.vehicleId),
  }))
  on(binder, contract.getProposal)(({ actor, params }) => proposals.getProposal(deps.db, actor, params.proposalId))
  on(
    binder,
    contract.decideCells,
  )(({ actor, params, body }) => proposals.decideCells(deps, actor, params.proposalId, body))
  on(binder, contract.cancelProposal)(({ actor, params }) => proposals.cancelProposal(deps, actor, params.proposalId))
  on(
    binder,
    contract.makeRevision,
  )(({ actor, params, body }) => proposals.makeRevision(deps, actor, params.proposalId, body))
  on(binder, contract.chooseLogs)(({ actor, params, body }) => chooseLogs(deps, actor, params.proposalId, body))
  on(
    binder,
    contract.getCellSamples,
  )(async ({ actor, params }) => ({
    samples: await inspect.readCellSamples(deps, actor, params.proposalId, params.cell),
  }))
  on(
    binder,
    contract.replayDrive,
  )(({ actor, params, query }) => inspect.replayForProposal(deps, actor, params.proposalId, query))
  on(binder, contract.getMoved)(({ actor, params }) => carrying.getMoved(deps.db, actor, params.proposalId))
  on(binder, contract.carryOver)(({ actor, params, body }) => carrying.carryOver(deps, actor, params.proposalId, body))
}
