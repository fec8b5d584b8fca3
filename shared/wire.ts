/** The edge between JSON and the core: a missing number is null on the wire and NaN inside. */
import { z } from 'zod'

/** Numbers of a table on the wire: null where there is none. */
export const Numbers = z.array(z.number().nullable())
export type Numbers = z.infer<typeof Numbers>

export const toWire = (values: ArrayLike<number>): Numbers =>
  Array.from(values, (value) => (Number.isFinite(value) ? value : null))

export const fromWire = (values: readonly (number | null)[]): Float64Array =>
  Float64Array.from(values, (value) => value ?? Number.NaN)

export const Id = z.uuid()
export const Instant = z.iso.datetime()

export const GridShape = z.strictObject({
  rpm: z.array(z.number()).min(2).max(64),
  mapKpa: z.array(z.number()).min(2).max(64),
})
export type GridShape = z.infer<typeof GridShape>

/** A successful answer that carries nothing else. */
export const Done = z.object({ done: z.literal(true) })
export type Done = z.infer<typeof Done>
