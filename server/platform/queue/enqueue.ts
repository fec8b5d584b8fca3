/** Jobs enter the queue inside the transaction of the fact they follow from, so that neither exists without the other. */
import { sql } from 'drizzle-orm'
import type { Reader } from '../db/client.ts'

/** @param key  A job with the same key that has not started is replaced instead of doubled. */
export async function enqueue(tx: Reader, name: string, payload: Record<string, unknown>, key?: string): Promise<void> {
  await tx.execute(sql`
    select graphile_worker.add_job(${name}, ${JSON.stringify(payload)}::json, job_key := ${key ?? null}, max_attempts := 5)
  `)
}
