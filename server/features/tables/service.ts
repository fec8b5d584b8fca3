/** Use cases of tables and their revisions; later nouns append and move revisions through here. */
import type { Revision, RevisionLine, TablePreview } from '../../../shared/contract/tables.ts'
import { eq } from 'drizzle-orm'
import { sameGrid, type Grid } from '../../../shared/grid.ts'
import { revisionMoves, type RevisionMove } from '../../../shared/lifecycle.ts'
import { fromWire, toWire } from '../../../shared/wire.ts'
import { readTable } from '../../core/tables/read-table.ts'
import type { Deps } from '../../deps.ts'
import { recordAudit } from '../../platform/audit/record.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { revisions } from '../../platform/db/schema/tables.ts'
import { scopeOf, type Actor, type Scope } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { currentSheet, lockVehicle, setFlashedRevision, vehicleInScope } from '../vehicles/service.ts'
import { checksumOf, decodeCells, encodeCells } from './cells.ts'
import * as store from './store.ts'

export type { RevisionRow, TableKind } from './store.ts'

export interface Table {
  readonly id: string
  readonly number: number
  readonly state: RevisionLine['state']
  readonly checksum: string
  readonly grid: Grid
  readonly values: Float64Array
}

const gridOf = (row: store.RevisionRow): Grid => ({ rpm: row.rpmAxis, mapKpa: row.mapAxis })
const toTable = (row: store.RevisionRow): Table => ({
  id: row.id,
  number: row.number,
  state: row.state,
  checksum: row.checksum,
  grid: gridOf(row),
  values: decodeCells(row.cells),
})

function toLine({ row, author, signer, flashedId }: store.RevisionFound): RevisionLine {
  return {
    id: row.id,
    vehicleId: row.vehicleId,
    kind: row.kind,
    number: row.number,
    parentId: row.parentId,
    state: row.state,
    author: { id: row.authorId, name: author },
    createdAt: row.createdAt.toISOString(),
    note: row.note,
    origin: row.origin,
    logs: row.logs.map(({ id, number, title }) => ({ id, number, title })),
    cellsChanged: row.cellsChanged,
    checksum: row.checksum,
    signature:
      row.signedById && row.signedAt
        ? {
            by: { id: row.signedById, name: signer ?? row.signatureName ?? '' },
            at: row.signedAt.toISOString(),
            note: row.signatureNote ?? '',
            byAuthor: row.signedById === row.authorId,
          }
        : null,
    flashed: flashedId === row.id,
  }
}

async function toRevision(db: Reader, found: store.RevisionFound): Promise<Revision> {
  const { row } = found
  const parent = row.parentId ? await store.rowById(db, row.parentId) : null
  const comparable = parent !== null && sameGrid(gridOf(parent), gridOf(row))
  return {
    ...toLine(found),
    logs: row.logs,
    grid: { rpm: row.rpmAxis, mapKpa: row.mapAxis },
    values: toWire(decodeCells(row.cells)),
    parentValues: comparable ? toWire(decodeCells(parent.cells)) : null,
    proposalId: row.proposalId,
    settings: row.settings,
    coreVersion: row.coreVersion,
    provenance: row.provenance,
  }
}

/** @throws Problem not-found for what the scope may not see. */
export async function revisionInScope(db: Reader, scope: Scope, revisionId: string): Promise<store.RevisionFound> {
  const found = await store.revisionById(db, scope, revisionId)
  if (!found) throw new Problem('not-found')
  return found
}

export async function getRevision(db: Reader, scope: Scope, revisionId: string): Promise<Revision> {
  return toRevision(db, await revisionInScope(db, scope, revisionId))
}

/** True while the stored axes and cells give the checksum that was stored with them. */
export const isIntact = ({ grid, values, checksum }: Revision): boolean =>
  checksumOf(grid, fromWire(values)) === checksum

/** Keeps a revision in its state until the transaction ends; whoever would move it waits. */
export const holdState = (tx: Tx, revisionId: string) =>
  tx.select({ id: revisions.id }).from(revisions).where(eq(revisions.id, revisionId)).for('share')

/** The history of one kind of table, newest first. */
export const linesOf = async (db: Reader, scope: Scope, vehicleId: string, kind?: store.TableKind) =>
  (await store.revisionsOf(db, scope, vehicleId, kind)).map(toLine)

export async function listRevisions(
  deps: Deps,
  actor: Actor,
  vehicleId: string,
  kind?: store.TableKind,
): Promise<RevisionLine[]> {
  const scope = scopeOf(actor)
  await vehicleInScope(deps.db, scope, vehicleId)
  return linesOf(deps.db, scope, vehicleId, kind)
}

/** Tables of the vehicle, newest first, with their cells: for comparing a read-back. */
export async function tablesOf(db: Reader, scope: Scope, vehicleId: string, kind: store.TableKind): Promise<Table[]> {
  return (await store.revisionsOf(db, scope, vehicleId, kind)).map(({ row }) => toTable(row))
}

/** The table that is in the engine, else the newest; null where there is none. */
export async function currentTable(
  db: Reader,
  scope: Scope,
  vehicleId: string,
  kind: store.TableKind,
): Promise<Table | null> {
  const all = await store.revisionsOf(db, scope, vehicleId, kind)
  const chosen = all.find(({ row, flashedId }) => row.id === flashedId) ?? all[0]
  return chosen ? toTable(chosen.row) : null
}

export async function tableById(db: Reader, revisionId: string): Promise<Table | null> {
  const row = await store.rowById(db, revisionId)
  return row ? toTable(row) : null
}

async function stoichOf(db: Reader, vehicleId: string): Promise<number> {
  return (await currentSheet(db, vehicleId))?.stoichAfr ?? 14.7
}

export async function previewTable(
  deps: Deps,
  actor: Actor,
  vehicleId: string,
  input: { kind: store.TableKind; text: string },
): Promise<TablePreview> {
  await vehicleInScope(deps.db, scopeOf(actor), vehicleId)
  const reading = readTable(input.text, { kind: input.kind, stoichAfr: await stoichOf(deps.db, vehicleId) })
  if (!reading.ok) return { ok: false, problems: [...reading.problems] }
  const { grid, values, notes } = reading
  return { ok: true, grid: { rpm: [...grid.rpm], mapKpa: [...grid.mapKpa] }, values: toWire(values), notes: [...notes] }
}

export interface NewRevision {
  readonly vehicleId: string
  readonly kind: store.TableKind
  readonly grid: Grid
  readonly values: Float64Array
  readonly parentId: string | null
  readonly cellsChanged: number
  readonly origin: RevisionLine['origin']
  readonly note: string
  readonly proposalId?: string
  readonly logs?: { id: string; number: number; title: string; sha256: string }[]
  readonly settings?: Record<string, unknown>
  readonly coreVersion?: string
  readonly provenance?: NonNullable<store.RevisionRow['provenance']>
}

/** Stores a draft under the next number. The caller holds no lock; this takes the vehicle's. */
export async function appendRevision(tx: Tx, actor: Actor, input: NewRevision): Promise<store.RevisionRow> {
  await lockVehicle(tx, input.vehicleId)
  const number = (await store.lastNumber(tx, input.vehicleId, input.kind)) + 1
  const { grid, values, ...rest } = input
  const [row] = await tx
    .insert(revisions)
    .values({
      ...rest,
      number,
      authorId: actor.personId,
      rpmAxis: [...grid.rpm],
      mapAxis: [...grid.mapKpa],
      cells: encodeCells(values),
      checksum: checksumOf(grid, values),
    })
    .returning()
  await recordAudit(tx, actor, {
    action: 'revision.make',
    subject: `${input.kind === 've' ? 'Revision' : 'Target table'} ${number}`,
    vehicleId: input.vehicleId,
    facts: { revisionId: row!.id, checksum: row!.checksum, origin: input.origin, cellsChanged: input.cellsChanged },
  })
  return row!
}

export async function bringTable(
  deps: Deps,
  actor: Actor,
  vehicleId: string,
  input: { kind: store.TableKind; text: string; origin: RevisionLine['origin']; note: string; inEngine: boolean },
): Promise<Revision> {
  const scope = scopeOf(actor)
  return deps.db.transaction(async (tx) => {
    await vehicleInScope(tx, scope, vehicleId)
    const reading = readTable(input.text, { kind: input.kind, stoichAfr: await stoichOf(tx, vehicleId) })
    if (!reading.ok) {
      throw new Problem('table-unreadable', {
        detail: reading.problems[0]?.detail ?? 'It is no table.',
        errors: reading.problems.map((each) => ({
          detail:
            each.row === null
              ? each.detail
              : `Row ${each.row}${each.col === null ? '' : `, column ${each.col}`}: ${each.detail}`,
          pointer: '#/text',
        })),
      })
    }
    const { grid, values } = reading
    const before = await currentTable(tx, scope, vehicleId, input.kind)
    const comparable = before !== null && sameGrid(before.grid, grid)
    const row = await appendRevision(tx, actor, {
      vehicleId,
      kind: input.kind,
      grid,
      values,
      parentId: before?.id ?? null,
      cellsChanged: comparable
        ? values.reduce((sum, value, i) => sum + (value === before.values[i] ? 0 : 1), 0)
        : values.length,
      origin: input.origin,
      note: input.note,
    })
    if (input.inEngine && input.kind === 've') await setFlashedRevision(tx, vehicleId, row.id)
    return getRevision(tx, scope, row.id)
  })
}

/** @throws Problem not-signed for an unsigned revision, unless the caller says that they know. */
export async function markFlashed(
  deps: Deps,
  actor: Actor,
  revisionId: string,
  input: { unsigned: boolean },
): Promise<Revision> {
  const scope = scopeOf(actor)
  return deps.db.transaction(async (tx) => {
    const { row } = await revisionInScope(tx, scope, revisionId)
    if (row.kind !== 've')
      throw new Problem('move-not-legal', { detail: 'Only a fuel table is marked as in the engine.' })
    if (row.state !== 'signed' && !input.unsigned)
      throw new Problem('not-signed', {
        detail: `Nobody has signed revision ${row.number}, and an unproven table can ruin an engine. Say so plainly ("unsigned": true) to record that it is in the engine all the same.`,
      })
    await setFlashedRevision(tx, row.vehicleId, row.id)
    await recordAudit(tx, actor, {
      action: 'revision.flash',
      subject: `Revision ${row.number}${row.state === 'signed' ? '' : ', not signed'}`,
      vehicleId: row.vehicleId,
      facts: { revisionId, state: row.state, checksum: row.checksum },
    })
    return getRevision(tx, scope, revisionId)
  })
}

/**
 * Moves a revision along its life cycle; races are settled by the update itself.
 * @throws Problem revision-already-signed or move-not-legal
 */
export async function moveRevision(
  tx: Tx,
  revisionId: string,
  move: RevisionMove,
  patch: Partial<store.RevisionRow> = {},
): Promise<store.RevisionRow> {
  const { from, to } = revisionMoves[move]
  const moved = await store.updateFrom(tx, revisionId, from, { ...patch, state: to })
  if (moved) return moved
  const now = await store.rowById(tx, revisionId)
  if (now?.state === 'signed') throw new Problem('revision-already-signed')
  throw new Problem('move-not-legal', {
    detail: `The revision is ${now?.state.replace('-', ' ') ?? 'gone'} at the moment.`,
  })
}
