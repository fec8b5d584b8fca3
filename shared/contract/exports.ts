/** Files that leave the product, and the check of what came back from the controller. */
import { z } from 'zod'
import { endpoint } from '../endpoint.ts'
import { revisionStates } from '../lifecycle.ts'
import { Id } from '../wire.ts'
import { RevisionRef } from './tables.ts'
import { VehicleRef } from './vehicles.ts'

/** How a table is written out. */
export const TableForm = z.strictObject({
  axes: z.enum(['rpm-across', 'rpm-down']).default('rpm-across'),
  decimal: z.enum(['point', 'comma']).default('point'),
  /** Decimal places; without it as many as reading back to the same number takes. */
  places: z.coerce.number().int().min(0).max(6).optional(),
  /** Unit of the MAP axis, absolute. */
  map: z.enum(['kPa', 'bar', 'psi']).default('kPa'),
  /** For target tables; AFR is lambda times the stoichiometric ratio of the engine sheet. */
  target: z.enum(['lambda', 'afr']).default('lambda'),
})
export type TableForm = z.infer<typeof TableForm>

export const exportTable = endpoint({
  method: 'GET',
  path: '/api/revisions/:revisionId/table.csv',
  access: 'export:read',
  summary: 'The table as CSV with its state and checksum; a draft says draft',
  params: RevisionRef,
  query: TableForm,
  produces: 'text/csv',
})
export const exportCells = endpoint({
  method: 'GET',
  path: '/api/revisions/:revisionId/cells',
  access: 'export:read',
  summary: 'The same text with tabs, to be pasted into a spreadsheet; a draft says draft in its first line',
  params: RevisionRef,
  query: TableForm,
  response: z.object({ text: z.string() }),
})
export const exportProvenance = endpoint({
  method: 'GET',
  path: '/api/revisions/:revisionId/revision.json',
  access: 'export:read',
  summary:
    'The revision with its whole provenance as JSON: parent, logs with their hashes, settings, review, signature',
  params: RevisionRef,
  produces: 'application/json',
})
export const exportChangeSheet = endpoint({
  method: 'GET',
  path: '/api/revisions/:revisionId/change-sheet.pdf',
  access: 'export:read',
  summary:
    'The change sheet to print: table, changed cells, checks, cautions, signatures; a draft says so on every page',
  params: RevisionRef,
  produces: 'application/pdf',
})

export const ReadBackCell = z.object({
  cell: z.number().int(),
  rpm: z.number(),
  mapKpa: z.number(),
  expected: z.number(),
  found: z.number(),
})
export type ReadBackCell = z.infer<typeof ReadBackCell>

const ReadBackRevision = z.object({
  id: Id,
  number: z.number().int(),
  state: z.enum(revisionStates),
  /** True for the revision that is recorded as in the engine. */
  inEngine: z.boolean(),
})

export const ReadBack = z.object({
  /** The revision whose values these are, if one matches to the places that were read back. */
  matches: ReadBackRevision.nullable(),
  /** Other revisions that the read-back cannot tell from it. */
  alsoMatches: z.array(ReadBackRevision),
  /** The closest revision of the same axes, with the cells that differ. */
  closest: ReadBackRevision.extend({ differ: z.array(ReadBackCell) }).nullable(),
  /** Breakpoints that differ from the revision of the same size that comes nearest; empty where the axes agree. */
  axes: z.array(z.object({ axis: z.enum(['rpm', 'kPa']), expected: z.number(), found: z.number() })),
  /** Values nearer than this were taken as the same, in table units. */
  within: z.number(),
  detail: z.string(),
})
export type ReadBack = z.infer<typeof ReadBack>

export const checkReadBack = endpoint({
  method: 'POST',
  path: '/api/vehicles/:vehicleId/read-backs',
  access: 'export:read',
  summary: 'Compare a table read back from the controller with the revisions; nothing is stored',
  params: VehicleRef,
  body: z.strictObject({ text: z.string().max(400_000), kind: z.enum(['ve', 'target']).default('ve') }),
  response: ReadBack,
})
