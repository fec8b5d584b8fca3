/** Column kinds that drizzle does not have: bytes, and the id and instant every table uses. */
import { customType, timestamp, uuid } from 'drizzle-orm/pg-core'

/** Raw bytes; read as a copy, because a driver's Buffer may start at an offset that no typed array can. */
export const bytes = customType<{ data: Uint8Array; driverData: Buffer }>({
  dataType: () => 'bytea',
  toDriver: (value) => Buffer.from(value.buffer, value.byteOffset, value.byteLength),
  fromDriver: (value) => new Uint8Array(value),
})

export const id = () => uuid().primaryKey().defaultRandom()
export const instant = () => timestamp({ withTimezone: true, mode: 'date' })
export const createdAt = () => instant().notNull().defaultNow()
