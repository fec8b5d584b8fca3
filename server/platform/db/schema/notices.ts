/** Tables of the notices noun: what a person was told, and which kinds reach them how. */
import { bigserial, boolean, index, pgTable, primaryKey, text, uuid } from 'drizzle-orm/pg-core'
import type { NoticeKind } from '../../../../shared/contract/notices.ts'
import { people, workshops } from './accounts.ts'
import { createdAt, instant } from './columns.ts'
import { vehicles } from './vehicles.ts'

export const notices = pgTable(
  'notices',
  {
    id: bigserial({ mode: 'number' }).primaryKey(),
    workshopId: uuid()
      .notNull()
      .references(() => workshops.id),
    personId: uuid()
      .notNull()
      .references(() => people.id),
    vehicleId: uuid()
      .notNull()
      .references(() => vehicles.id),
    kind: text().$type<NoticeKind>().notNull(),
    title: text().notNull(),
    words: text().notNull().default(''),
    /** Address of the page it speaks of, without the host. */
    path: text().notNull(),
    createdAt: createdAt(),
    readAt: instant(),
  },
  (table) => [index().on(table.personId, table.workshopId, table.id)],
)

/** Absent means both: in the list and by mail. */
export const noticeChoices = pgTable(
  'notice_choices',
  {
    workshopId: uuid()
      .notNull()
      .references(() => workshops.id),
    personId: uuid()
      .notNull()
      .references(() => people.id),
    kind: text().$type<NoticeKind>().notNull(),
    inApp: boolean().notNull(),
    mail: boolean().notNull(),
  },
  (table) => [primaryKey({ columns: [table.workshopId, table.personId, table.kind] })],
)
