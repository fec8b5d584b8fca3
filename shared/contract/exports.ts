/** Files that leave the product, and the check of what came back from the controller. */
import { z } from 'zod'
import { endpoint } from '../endpoint.ts'
import { Id } from '../wire.ts'
import { RevisionRef } from './tables.ts'
import { VehicleRef } from './vehicles.ts'

export const exportTable = endpoint({
  method: 'GET',
  path: '/api/revisions/:revisionId/table.csv',
  access: 'export:read',
  summary: 'The table as CSV with its state and checksum; a draft says draft',
  params: RevisionRef,
  query: z.strictObject({
    axes: z.enum(['rpm-across', 'rpm-down']).default('rpm-across'),
    decimal: z.enum(['point', 'comma']).default('point'),
  }),
  produces: 'text/csv',
})
export const exportProvenance = endpoint({
  method: 'GET',
  path: '/api/revisions/:revisionId/revision.json',
  access: 'export:read',
  summary: 'The revision with its whole provenance as JSON',
  params: RevisionRef,
  produces: 'application/json',
})

export const ReadBack = z.object({
  /** The revision whose values these are, if one matches exactly. */
  matches: z.object({ id: Id, number: z.number().int(), state: z.string() }).nullable(),
  /** The closest revision of the same axes, with the cells that differ. */
  closest: z
    .object({
      id: Id,
      number: z.number().int(),
      differ: z.array(z.object({ cell: z.number().int(), expected: z.number(), found: z.number() })),
    })
    .nullable(),
  detail: z.string(),
})
export type ReadBack = z.infer<typeof ReadBack>

export const checkReadBack = endpoint({
  method: 'POST',
  path: '/api/vehicles/:vehicleId/read-backs',
  access: 'export:read',
  summary: 'Compare a table read back from the controller with the revisions',
  params: VehicleRef,
  body: z.strictObject({ text: z.string().max(400_000), kind: z.enum(['ve', 'target']).default('ve') }),
  response: ReadBack,
})
