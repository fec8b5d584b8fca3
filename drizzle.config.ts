/** Where drizzle-kit finds the tables and leaves the migrations. */
import { defineConfig } from 'drizzle-kit'

export default defineConfig({
  dialect: 'postgresql',
  schema: './server/platform/db/schema/all.ts',
  out: './drizzle',
  casing: 'snake_case',
})
