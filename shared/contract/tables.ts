/** Fuel and target tables and their revisions. */
import { z } from 'zod'
import { endpoint } from '../endpoint.ts'
import { revisionStates } from '../lifecycle.ts'
import { GridShape, Id, Instant, Numbers } from '../wire.ts'
import { VehicleRef } from './vehicles.ts'

/** `ve`: volumetric efficiency in %, `target`: lambda. */
export const TableKind = z.enum(['ve', 'target'])
export type TableKind = z.infer<typeof TableKind>

export const TableFault = z.object({
  row: z.number().nullable(),
  col: z.number().nullable(),
  text: z.string(),
  detail: z.string(),
})
export type TableFault = z.infer<typeof TableFault>

export const TablePreview = z.discriminatedUnion('ok', [
  z.object({ ok: z.literal(true), grid: GridShape, values: Numbers, notes: z.array(z.string()) }),
  z.object({ ok: z.literal(false), problems: z.array(TableFault) }),
])
export type TablePreview = z.infer<typeof TablePreview>

/** A line of the history; `Revision` carries the cells as well. */
export const RevisionLine = z.object({
  id: Id,
  vehicleId: Id,
  kind: TableKind,
  number: z.number().int(),
  parentId: Id.nullable(),
  state: z.enum(revisionStates),
  author: z.object({ id: Id, name: z.string() }),
  createdAt: Instant,
  note: z.string(),
  origin: z.enum(['upload', 'paste', 'proposal', 'hand', 'seed', 'restored']),
  logs: z.array(z.object({ id: Id, number: z.number().int(), title: z.string() })),
  cellsChanged: z.number().int(),
  /** SHA-256 of the canonical text of axes and values, hexadecimal. */
  checksum: z.string(),
  signature: z
    .object({
      by: z.object({ id: Id, name: z.string() }),
      at: Instant,
      note: z.string(),
      /** True where the author signed, which the workshop must allow. */
      byAuthor: z.boolean(),
    })
    .nullable(),
  flashed: z.boolean(),
})
export type RevisionLine = z.infer<typeof RevisionLine>

export const CellProvenance = z.object({
  decision: z.array(z.enum(['none', 'accepted', 'kept', 'by-hand', 'pinned', 'held', 'open'])),
  evidenceS: Numbers,
  sigmaPct: Numbers,
})

export const Revision = RevisionLine.extend({
  /** With the SHA-256 of each log's file as it was when it was learned from. */
  logs: z.array(z.object({ id: Id, number: z.number().int(), title: z.string(), sha256: z.string() })),
  grid: GridShape,
  values: Numbers,
  parentValues: Numbers.nullable(),
  proposalId: Id.nullable(),
  settings: z.record(z.string(), z.unknown()).nullable(),
  coreVersion: z.string().nullable(),
  provenance: CellProvenance.nullable(),
})
export type Revision = z.infer<typeof Revision>

export const RevisionRef = z.strictObject({ revisionId: Id })

export const previewTable = endpoint({
  method: 'POST',
  path: '/api/vehicles/:vehicleId/table-previews',
  access: 'table:edit',
  summary: 'Read a pasted or uploaded table and say what is wrong with it; nothing is stored',
  params: VehicleRef,
  body: z.strictObject({ kind: TableKind, text: z.string().max(400_000) }),
  response: TablePreview,
})
export const bringTable = endpoint({
  method: 'POST',
  path: '/api/vehicles/:vehicleId/revisions',
  access: 'table:edit',
  summary: 'Store a table as a new draft revision',
  params: VehicleRef,
  body: z.strictObject({
    kind: TableKind,
    text: z.string().max(400_000),
    origin: z.enum(['upload', 'paste']),
    note: z.string().max(500).default(''),
    /** True: this is what the controller holds at the moment. */
    inEngine: z.boolean().default(false),
  }),
  response: Revision,
})
export const listRevisions = endpoint({
  method: 'GET',
  path: '/api/vehicles/:vehicleId/revisions',
  access: 'table:read',
  summary: 'History of the vehicle’s tables, newest first; owners see what is signed or in the engine',
  params: VehicleRef,
  query: z.strictObject({ kind: TableKind.optional() }),
  response: z.object({ revisions: z.array(RevisionLine) }),
})
export const getRevision = endpoint({
  method: 'GET',
  path: '/api/revisions/:revisionId',
  access: 'table:read',
  summary: 'One revision with its cells, those of its parent, and where each value came from',
  params: RevisionRef,
  response: Revision,
})
export const markFlashed = endpoint({
  method: 'POST',
  path: '/api/revisions/:revisionId/flashed',
  access: 'table:edit',
  summary: 'Record that this revision is now in the engine; an unsigned one only when that is said',
  params: RevisionRef,
  /** `unsigned: true` says that the caller knows nobody has signed it; without it an unsigned revision is refused. */
  body: z.strictObject({ unsigned: z.boolean().default(false) }),
  response: Revision,
})
