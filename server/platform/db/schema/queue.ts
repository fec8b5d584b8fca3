/** The worker processes' pulse, so that jobs of a silent one are taken up again. */
import { pgTable, text } from 'drizzle-orm/pg-core'
import { instant } from './columns.ts'

export const workerBeats = pgTable('worker_beats', {
  /** The queue pool's id, which is what graphile-worker locks jobs with. */
  poolId: text().primaryKey(),
  seenAt: instant().notNull(),
})
