/** `npm run db:migrate`: brings the database to the present schema and leaves. */
import { readConfig } from './config.ts'
import { buildDeps, closeDeps } from './deps.ts'
import { migrateAll } from './platform/db/migrate.ts'

const deps = buildDeps(readConfig(process.env))
await migrateAll(deps)
await closeDeps(deps)
