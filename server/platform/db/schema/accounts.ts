/** Tables of the accounts noun: people, workshops, memberships, sessions, links, access tokens. */
import { boolean, index, integer, pgTable, primaryKey, text, uuid } from 'drizzle-orm/pg-core'
import { createdAt, id, instant } from './columns.ts'

export const workshops = pgTable('workshops', {
  id: id(),
  name: text().notNull(),
  allowOwnSignOff: boolean().notNull().default(false),
  createdAt: createdAt(),
})

export const people = pgTable('people', {
  id: id(),
  name: text().notNull(),
  /** Lower case. */
  email: text().notNull().unique(),
  passwordHash: text().notNull(),
  createdAt: createdAt(),
})

export const memberships = pgTable(
  'memberships',
  {
    workshopId: uuid()
      .notNull()
      .references(() => workshops.id),
    personId: uuid()
      .notNull()
      .references(() => people.id),
    /** Role names of shared/access.ts. */
    roles: text().array().notNull(),
    createdAt: createdAt(),
  },
  (table) => [primaryKey({ columns: [table.workshopId, table.personId] })],
)

export const sessions = pgTable(
  'sessions',
  {
    id: id(),
    personId: uuid()
      .notNull()
      .references(() => people.id),
    workshopId: uuid()
      .notNull()
      .references(() => workshops.id),
    createdAt: createdAt(),
    expiresAt: instant().notNull(),
    revokedAt: instant(),
  },
  (table) => [index().on(table.personId)],
)

/** One-time links from mails; only the SHA-256 of the secret is kept. */
export const passwordResets = pgTable('password_resets', {
  id: id(),
  personId: uuid()
    .notNull()
    .references(() => people.id),
  secretHash: text().notNull().unique(),
  createdAt: createdAt(),
  expiresAt: instant().notNull(),
  usedAt: instant(),
})

export const invitations = pgTable(
  'invitations',
  {
    id: id(),
    workshopId: uuid()
      .notNull()
      .references(() => workshops.id),
    email: text().notNull(),
    roles: text().array().notNull(),
    vehicleIds: uuid().array().notNull(),
    secretHash: text().notNull().unique(),
    invitedById: uuid()
      .notNull()
      .references(() => people.id),
    createdAt: createdAt(),
    expiresAt: instant().notNull(),
    usedAt: instant(),
    withdrawnAt: instant(),
  },
  (table) => [index().on(table.workshopId)],
)

export const accessTokens = pgTable(
  'access_tokens',
  {
    id: id(),
    personId: uuid()
      .notNull()
      .references(() => people.id),
    workshopId: uuid()
      .notNull()
      .references(() => workshops.id),
    label: text().notNull(),
    role: text().notNull(),
    secretHash: text().notNull().unique(),
    createdAt: createdAt(),
    lastUsedAt: instant(),
    revokedAt: instant(),
  },
  (table) => [index().on(table.personId)],
)

/** Failed tries at sign-in and resets, by address and by account. */
export const tries = pgTable('tries', {
  key: text().primaryKey(),
  windowStart: instant().notNull(),
  tries: integer().notNull(),
})
