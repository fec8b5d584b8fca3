/** Mails the demo mailbox has received; empty wherever a real mail server is configured. */
import { pgTable, text } from 'drizzle-orm/pg-core'
import { createdAt, id } from './columns.ts'

export const demoMails = pgTable('demo_mails', {
  id: id(),
  recipient: text().notNull(),
  subject: text().notNull(),
  text: text().notNull(),
  html: text().notNull(),
  createdAt: createdAt(),
})
