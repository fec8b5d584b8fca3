/** Tables of the vehicles noun: vehicles, who owns them, engine sheets by writing. */
import { boolean, index, integer, jsonb, pgTable, primaryKey, text, unique, uuid } from 'drizzle-orm/pg-core'
import type { EngineSheetInput } from '../../../../shared/contract/vehicles.ts'
import { people, workshops } from './accounts.ts'
import { createdAt, id } from './columns.ts'

export const vehicles = pgTable(
  'vehicles',
  {
    id: id(),
    workshopId: uuid()
      .notNull()
      .references(() => workshops.id),
    name: text().notNull(),
    description: text().notNull().default(''),
    archived: boolean().notNull().default(false),
    /** Set by the tables noun; no foreign key, because revisions come later in the list of nouns. */
    flashedRevisionId: uuid(),
    version: integer().notNull().default(1),
    createdAt: createdAt(),
  },
  (table) => [index().on(table.workshopId)],
)

export const vehicleOwners = pgTable(
  'vehicle_owners',
  {
    vehicleId: uuid()
      .notNull()
      .references(() => vehicles.id),
    personId: uuid()
      .notNull()
      .references(() => people.id),
  },
  (table) => [primaryKey({ columns: [table.vehicleId, table.personId] })],
)

export const engineSheets = pgTable(
  'engine_sheets',
  {
    id: id(),
    vehicleId: uuid()
      .notNull()
      .references(() => vehicles.id),
    number: integer().notNull(),
    authorId: uuid()
      .notNull()
      .references(() => people.id),
    sheet: jsonb().$type<EngineSheetInput>().notNull(),
    createdAt: createdAt(),
  },
  (table) => [unique().on(table.vehicleId, table.number)],
)
