/** Use cases of proposals: ask for one, decide its cells, make a revision of what was decided. */
import { eq } from 'drizzle-orm'
import type { Proposal, ProposalLine } from '../../../shared/contract/proposals.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import type { CellDecision } from '../../../shared/lifecycle.ts'
import { fromWire } from '../../../shared/wire.ts'
import { coreVersion } from '../../core/learn.ts'
import type { Deps } from '../../deps.ts'
import { recordAudit } from '../../platform/audit/record.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { proposalLogs, proposals } from '../../platform/db/schema/proposals.ts'
import { scopeOf, type Actor, type Scope } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { enqueue } from '../../platform/queue/enqueue.ts'
import { logsInScope } from '../logs/service.ts'
import { appendRevision, currentTable, getRevision } from '../tables/service.ts'
import { currentSheet, lockVehicle, vehicleInScope } from '../vehicles/service.ts'
import * as store from './store.ts'

type Surface = NonNullable<Proposal['surface']>

/** The value the next revision takes, %. Controllers hold one decimal place, so a revision does too. */
function takenValue(surface: Surface, decision: CellDecision, byHand: number | null, cell: number): number {
  const current = surface.current[cell] ?? Number.NaN
  const value =
    decision === 'accepted'
      ? (surface.proposed[cell] ?? current)
      : decision === 'by-hand' || decision === 'pinned'
        ? (byHand ?? current)
        : current
  return value === current ? current : Math.round(value * 10) / 10
}

function countsOf(row: store.ProposalRow): ProposalLine['counts'] {
  const { surface, decisions, byHand } = row
  if (!surface) return null
  const held = new Set(surface.held.map(({ cell }) => cell))
  const open = decisions.flatMap((decision, cell) => (decision === 'open' ? [cell] : []))
  return {
    known: surface.evidenceS.filter((seconds) => (seconds ?? 0) > 0).length,
    total: surface.current.length,
    open: open.filter((cell) => !held.has(cell)).length,
    held: open.filter((cell) => held.has(cell)).length,
    changed: decisions.filter(
      (decision, cell) => takenValue(surface, decision, byHand[cell] ?? null, cell) !== surface.current[cell],
    ).length,
  }
}

async function toLine(db: Reader, { row, requester, baseNumber }: store.ProposalFound): Promise<ProposalLine> {
  const logs = await store.logsOf(db, row.id)
  return {
    id: row.id,
    vehicleId: row.vehicleId,
    number: row.number,
    state: row.state,
    step: row.step,
    progress: row.progress,
    trouble: row.trouble,
    requestedBy: requester,
    requestedAt: row.createdAt.toISOString(),
    base: { id: row.baseRevisionId, number: baseNumber },
    logs: logs.map(({ id, number, title, used, recordedOn, createdAt }) => ({
      id,
      number,
      title,
      used,
      drivenOn: recordedOn ?? createdAt.toISOString().slice(0, 10),
    })),
    counts: countsOf(row),
    revisionId: row.revisionId,
  }
}

async function toProposal(db: Reader, found: store.ProposalFound): Promise<Proposal> {
  const { row } = found
  return {
    ...(await toLine(db, found)),
    version: row.version,
    settings: row.settings,
    coreVersion: row.coreVersion,
    surface: row.surface,
    decisions: row.decisions,
    byHand: row.byHand,
    overtakenBy: await store.newerRevision(db, row, found.baseNumber),
  }
}

export async function proposalInScope(db: Reader, scope: Scope, proposalId: string): Promise<store.ProposalFound> {
  const found = await store.proposalById(db, scope, proposalId)
  if (!found) throw new Problem('not-found')
  return found
}

export async function getProposal(db: Reader, actor: Actor, proposalId: string): Promise<Proposal> {
  return toProposal(db, await proposalInScope(db, scopeOf(actor), proposalId))
}

export async function listProposals(deps: Deps, actor: Actor, vehicleId: string): Promise<ProposalLine[]> {
  await vehicleInScope(deps.db, scopeOf(actor), vehicleId)
  const rows = await store.proposalsOf(deps.db, scopeOf(actor), vehicleId)
  return Promise.all(rows.map((row) => toLine(deps.db, row)))
}

/** Freezes what will be learned from and puts the work in the queue. */
export async function requestProposal(
  deps: Deps,
  actor: Actor,
  vehicleId: string,
  input: { logIds: string[]; stepCapPct: number },
): Promise<Proposal> {
  const scope = scopeOf(actor)
  return deps.db.transaction(async (tx) => {
    await vehicleInScope(tx, scope, vehicleId)
    const chosen = await logsInScope(tx, scope, vehicleId, input.logIds)
    const notReady = chosen.find((log) => log.state !== 'ready' || log.flashedRevision === null)
    if (notReady) {
      throw new Problem('log-not-ready', {
        detail:
          notReady.state === 'ready'
            ? `Say which revision was in the engine when Log ${notReady.number} was recorded.`
            : `Log ${notReady.number} is not read yet or could not be read.`,
      })
    }
    const base = await currentTable(tx, scope, vehicleId, 've')
    if (!base) throw new Problem('no-table-yet', { detail: 'Bring the fuel table that is in the controller first.' })
    const target = await currentTable(tx, scope, vehicleId, 'target')
    if (!target)
      throw new Problem('no-target-yet', { detail: 'Bring the target table first: learning compares with it.' })
    const sheet = await currentSheet(tx, vehicleId)
    if (!sheet)
      throw new Problem('no-table-yet', {
        detail: 'Fill in the engine sheet first: learning needs displacement and sensor range.',
      })
    await lockVehicle(tx, vehicleId)
    const number = (await store.lastNumber(tx, vehicleId)) + 1
    const settings = {
      stepCapPct: input.stepCapPct,
      engineSheet: sheet.number,
      base: base.checksum,
      target: target.checksum,
      logs: chosen.map((log) => log.sha256),
    }
    const [row] = await tx
      .insert(proposals)
      .values({
        vehicleId,
        number,
        requestedById: actor.personId,
        baseRevisionId: base.id,
        targetRevisionId: target.id,
        settings,
        coreVersion,
        step: 'Waiting for a worker',
      })
      .returning()
    await tx.insert(proposalLogs).values(chosen.map((log) => ({ proposalId: row!.id, logId: log.id })))
    await enqueue(tx, 'proposal.learn', { proposalId: row!.id }, `proposal.learn:${row!.id}`)
    await recordAudit(tx, actor, {
      action: 'proposal.request',
      subject: `Proposal ${number}`,
      vehicleId,
      facts: { ...settings, proposalId: row!.id },
    })
    return getProposal(tx, actor, row!.id)
  })
}

export interface CellChange {
  readonly cell: number
  readonly decision: CellDecision
  readonly value?: number | undefined
}

/** The open proposal's surface with its logs, for looking closer. @throws Problem proposal-not-open while there is none. */
export async function openSurface(
  deps: Pick<Deps, 'db'>,
  actor: Actor,
  proposalId: string,
): Promise<{ row: store.ProposalRow; surface: Surface; logs: Awaited<ReturnType<typeof store.logsOf>> }> {
  const { row } = await proposalInScope(deps.db, scopeOf(actor), proposalId)
  if (!row.surface) throw new Problem('proposal-not-open', { detail: `It is ${row.state} at the moment.` })
  return { row, surface: row.surface, logs: await store.logsOf(deps.db, proposalId) }
}

/** The table as the decisions so far make it, VE in %. */
export const takenTable = (row: store.ProposalRow, surface: Surface): Float64Array =>
  fromWire(surface.current).map((_, cell) =>
    takenValue(surface, row.decisions[cell] ?? 'open', row.byHand[cell] ?? null, cell),
  )

export const decidedMeanwhile =
  'Somebody decided cells of this proposal since you loaded it. Load it again; nothing of theirs is lost.'

/** Decides cells on the version that was seen. @throws Problem changed-meanwhile, so that nobody's decision is lost. */
export async function decideCells(
  deps: Deps,
  actor: Actor,
  proposalId: string,
  input: { version: number; cells: readonly CellChange[] },
): Promise<Proposal> {
  return deps.db.transaction(async (tx) => {
    const { row } = await openProposal(tx, actor, proposalId)
    const decisions = row.decisions.slice()
    const byHand = row.byHand.slice()
    for (const { cell, decision, value } of input.cells) {
      if (cell >= decisions.length)
        throw new Problem('input-invalid', { detail: `There is no cell ${cell} in this table.` })
      if (decision === 'by-hand' && value === undefined)
        throw new Problem('input-invalid', { detail: 'A cell set by hand needs its value.' })
      if (decision === 'accepted' && (row.surface?.evidenceS[cell] ?? 0) <= 0) {
        throw new Problem('input-invalid', {
          detail: 'A cell without evidence has nothing to accept: keep it or set it by hand.',
        })
      }
      decisions[cell] = decision
      byHand[cell] = decision === 'by-hand' || decision === 'pinned' ? (value ?? null) : null
    }
    const stored = await store.updateVersion(tx, proposalId, input.version, { decisions, byHand })
    if (!stored) throw new Problem('changed-meanwhile', { detail: decidedMeanwhile })
    await recordAudit(tx, actor, {
      action: 'proposal.decide',
      subject: `Proposal ${row.number}, ${input.cells.length} ${input.cells.length === 1 ? 'cell' : 'cells'}`,
      vehicleId: row.vehicleId,
      facts: { proposalId, cells: input.cells },
    })
    return getProposal(tx, actor, proposalId)
  })
}

export async function openProposal(tx: Reader, actor: Actor, proposalId: string): Promise<store.ProposalFound> {
  const found = await proposalInScope(tx, scopeOf(actor), proposalId)
  if (found.row.state !== 'open')
    throw new Problem('proposal-not-open', { detail: `It is ${found.row.state} at the moment.` })
  return found
}

export async function cancelProposal(deps: Deps, actor: Actor, proposalId: string): Promise<Proposal> {
  return deps.db.transaction(async (tx) => {
    const { row } = await proposalInScope(tx, scopeOf(actor), proposalId)
    const done = await store.updateFrom(tx, proposalId, ['queued', 'learning', 'open'], {
      state: 'cancelled',
      attempt: row.attempt + 1,
    })
    if (!done) throw new Problem('proposal-not-open')
    await recordAudit(tx, actor, {
      action: 'proposal.cancel',
      subject: `Proposal ${row.number}`,
      vehicleId: row.vehicleId,
      facts: { proposalId },
    })
    return getProposal(tx, actor, proposalId)
  })
}

export interface Revising {
  readonly version: number
  readonly note: string
  /** The whole table of the new revision, and the one it is made from. */
  readonly values: Float64Array
  readonly parent: { readonly id: string; readonly values: Float64Array }
  /** Cells that carry what this proposal decided; the others are the parent's. */
  readonly own: (cell: number) => boolean
  readonly settings: Record<string, unknown>
}

/** Appends the draft and closes the proposal on the version that was seen. @throws Problem nothing-accepted, changed-meanwhile */
export async function reviseFrom(
  tx: Tx,
  actor: Actor,
  row: store.ProposalRow,
  surface: Surface,
  { version, note, values, parent, own, settings }: Revising,
): Promise<Revision> {
  const cellsChanged = values.reduce((sum, value, cell) => sum + (value === parent.values[cell] ? 0 : 1), 0)
  if (cellsChanged === 0) throw new Problem('nothing-accepted')
  const held = new Set(surface.held.map(({ cell }) => cell))
  const revision = await appendRevision(tx, actor, {
    vehicleId: row.vehicleId,
    kind: 've',
    grid: surface.grid,
    values,
    parentId: parent.id,
    cellsChanged,
    origin: 'proposal',
    note,
    proposalId: row.id,
    logs: (await store.logsOf(tx, row.id)).filter((log) => log.used),
    settings,
    coreVersion: row.coreVersion,
    provenance: {
      decision: row.decisions.map((decision, cell) =>
        own(cell) ? (decision === 'open' && held.has(cell) ? 'held' : decision) : 'none',
      ),
      evidenceS: surface.evidenceS,
      sigmaPct: surface.sigmaPct,
    },
  })
  const closed = await store.updateVersion(tx, row.id, version, { state: 'revised', revisionId: revision.id })
  if (!closed) throw new Problem('changed-meanwhile', { detail: decidedMeanwhile })
  await tx.update(proposals).set({ step: '' }).where(eq(proposals.id, row.id))
  return getRevision(tx, scopeOf(actor), revision.id)
}

/** Accepted, hand-set and pinned cells make a draft; open and held cells keep their value. */
export async function makeRevision(
  deps: Deps,
  actor: Actor,
  proposalId: string,
  input: { version: number; note: string },
): Promise<Revision> {
  return deps.db.transaction(async (tx) => {
    const { row } = await openProposal(tx, actor, proposalId)
    const { surface } = row
    if (!surface) throw new Problem('proposal-not-open')
    return reviseFrom(tx, actor, row, surface, {
      ...input,
      values: takenTable(row, surface),
      parent: { id: row.baseRevisionId, values: fromWire(surface.current) },
      own: () => true,
      settings: row.settings,
    })
  })
}
