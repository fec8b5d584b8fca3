/** Failed tries at sign-in and resets, counted in the database so that every web process sees the same count. */
import { sql } from 'drizzle-orm'
import type { Deps } from '../../deps.ts'
import { Problem } from '../../platform/http/problem.ts'

const windowS = 900

/**
 * Counts one try under each key and refuses when any key has had too many in the last quarter of an hour.
 * @param keys  What is limited: an address, an account. Hashed by the caller where they are personal.
 * @throws Problem too-many-tries
 */
export async function countTry(deps: Deps, keys: readonly string[]): Promise<void> {
  for (const key of keys) {
    const { rows } = await deps.db.execute<{ tries: number; wait: number }>(sql`
      insert into tries (key, window_start, tries) values (${key}, now(), 1)
      on conflict (key) do update set
        tries = case when tries.window_start < now() - ${windowS} * interval '1 second' then 1 else tries.tries + 1 end,
        window_start = case when tries.window_start < now() - ${windowS} * interval '1 second' then now() else tries.window_start end
      returning tries, ${windowS} - extract(epoch from now() - window_start)::float8 as wait
    `)
    const row = rows[0]
    if (row && row.tries > deps.config.tryLimit) {
      throw new Problem('too-many-tries', {
        detail: `Try again in ${Math.ceil(row.wait / 60)} minutes.`,
        retryAfterS: row.wait,
      })
    }
  }
}

/** A success clears the account's own count. */
export const clearTries = (deps: Deps, key: string) => deps.db.execute(sql`delete from tries where key = ${key}`)
