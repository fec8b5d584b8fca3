/** Tables of the logs noun: logs, the kept originals, the channel blocks, the remembered mappings. */
import {
  date,
  doublePrecision,
  index,
  integer,
  jsonb,
  pgTable,
  primaryKey,
  text,
  unique,
  uuid,
} from 'drizzle-orm/pg-core'
import type { ChannelHealth, ColumnMapping, ReadFault } from '../../../../shared/contract/logs.ts'
import type { LogState } from '../../../../shared/lifecycle.ts'
import { people } from './accounts.ts'
import { bytes, createdAt, id, instant } from './columns.ts'
import { engineSheets, vehicles } from './vehicles.ts'
import { revisions } from './tables.ts'

export const logs = pgTable(
  'logs',
  {
    id: id(),
    vehicleId: uuid()
      .notNull()
      .references(() => vehicles.id),
    number: integer().notNull(),
    title: text().notNull(),
    note: text().notNull().default(''),
    fileName: text().notNull(),
    bytes: integer().notNull(),
    sha256: text().notNull(),
    state: text().$type<LogState>().notNull().default('received'),
    progress: doublePrecision().notNull().default(0),
    trouble: text(),
    rows: integer().notNull().default(0),
    durationS: doublePrecision().notNull().default(0),
    rateHz: doublePrecision().notNull().default(0),
    recordedOn: date(),
    uploadedById: uuid()
      .notNull()
      .references(() => people.id),
    flashedRevisionId: uuid().references(() => revisions.id),
    engineSheetId: uuid().references(() => engineSheets.id),
    mapping: jsonb().$type<ColumnMapping[]>().notNull().default([]),
    /** True once a person has said what the columns are; then recognition no longer overrides it. */
    mappingSetBy: uuid().references(() => people.id),
    health: jsonb().$type<ChannelHealth[]>().notNull().default([]),
    faults: jsonb().$type<ReadFault[]>().notNull().default([]),
    /** Grows with each reading; a stale worker's last write is refused by it. */
    attempt: integer().notNull().default(0),
    version: integer().notNull().default(1),
    createdAt: createdAt(),
    readAt: instant(),
  },
  (table) => [unique().on(table.vehicleId, table.number), unique().on(table.vehicleId, table.sha256)],
)

/** The original, compressed (gzip), in pieces of at most 1 MiB. */
export const logOriginals = pgTable(
  'log_originals',
  {
    logId: uuid()
      .notNull()
      .references(() => logs.id, { onDelete: 'cascade' }),
    piece: integer().notNull(),
    data: bytes().notNull(),
  },
  (table) => [primaryKey({ columns: [table.logId, table.piece] })],
)

/** One row is up to 65,536 samples of one channel, in the channel's stored unit. */
export const logBlocks = pgTable(
  'log_blocks',
  {
    logId: uuid()
      .notNull()
      .references(() => logs.id, { onDelete: 'cascade' }),
    channel: text().notNull(),
    block: integer().notNull(),
    samples: integer().notNull(),
    data: bytes().notNull(),
    /** Lowest and highest of every 64 samples, Float32 pairs. */
    level: bytes().notNull(),
  },
  (table) => [primaryKey({ columns: [table.logId, table.channel, table.block] })],
)

/** A mapping a person confirmed, remembered for logs of the vehicle with the same header. */
export const mappings = pgTable(
  'mappings',
  {
    vehicleId: uuid()
      .notNull()
      .references(() => vehicles.id),
    headerHash: text().notNull(),
    columns: jsonb().$type<{ index: number; channel: string | null; unit: string }[]>().notNull(),
    createdAt: createdAt(),
  },
  (table) => [primaryKey({ columns: [table.vehicleId, table.headerHash] }), index().on(table.vehicleId)],
)
