/** An endpoint is a value: the server binds it, the client calls it, the tests loop over it, the OpenAPI page is made from it. */
import type { z } from 'zod'
import type { Permission } from './access.ts'

/** Who may call: anybody, anybody signed in, or those whose roles carry the permission. */
export type Access = 'public' | 'signed-in' | Permission

export type Method = 'GET' | 'POST' | 'PUT' | 'PATCH' | 'DELETE'

/** What the body is: JSON by schema, or one file in the multipart field `file` beside the schema's text fields. */
export type BodyKind = 'json' | 'upload'

export interface Endpoint<Params, Query, Body, Result> {
  readonly method: Method
  /** Express path with named parameters, always below /api. */
  readonly path: `/api/${string}`
  readonly access: Access
  /** One line for the API page and the OpenAPI document. */
  readonly summary: string
  readonly params?: z.ZodType<Params>
  readonly query?: z.ZodType<Query>
  readonly body?: z.ZodType<Body>
  readonly bodyKind?: BodyKind
  /** Absent: the answer is a file (bytes), not JSON. */
  readonly response?: z.ZodType<Result>
  /** Media type of a file answer. */
  readonly produces?: string
}

export type AnyEndpoint = Endpoint<unknown, unknown, unknown, unknown>

/** Types an endpoint from its schemas; parts left out are `undefined`. */
export function endpoint<Params = undefined, Query = undefined, Body = undefined, Result = undefined>(
  value: Endpoint<Params, Query, Body, Result>,
): Endpoint<Params, Query, Body, Result> {
  return value
}
