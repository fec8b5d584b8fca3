/** Three kinds of tests: pure ones, the API on a real PostgreSQL, and pages in jsdom. */
import react from '@vitejs/plugin-react'
import { defineConfig } from 'vitest/config'

export default defineConfig({
  test: {
    maxWorkers: 2,
    projects: [
      {
        test: {
          name: 'unit',
          environment: 'node',
          include: ['tests/unit/**/*.test.ts', 'tests/architecture.test.ts'],
          setupFiles: ['tests/support/console-guard.ts'],
          // Learning a drive takes half a second; a busy machine may take twenty times that.
          testTimeout: 60_000,
        },
      },
      {
        test: {
          name: 'api',
          environment: 'node',
          include: ['tests/api/**/*.test.ts'],
          globalSetup: ['tests/support/template-database.ts'],
          setupFiles: ['tests/support/console-guard.ts'],
          testTimeout: 60_000,
          hookTimeout: 60_000,
        },
      },
      {
        plugins: [react()],
        test: {
          name: 'ui',
          environment: 'jsdom',
          include: ['tests/ui/**/*.test.tsx'],
          setupFiles: ['tests/support/console-guard.ts', 'tests/support/ui-setup.ts'],
        },
      },
    ],
  },
})
