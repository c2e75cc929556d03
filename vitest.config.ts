import { defineConfig } from 'vitest/config'

/**
 * unit: pure code, no database. architecture: import directions and the house rules.
 * api: the real server against a real MariaDB. browser: Debian's Chromium against the built product.
 */
export default defineConfig({
  test: {
    projects: [
      { test: { name: 'architecture', include: ['tests/architecture/**/*.test.ts'], sequence: { groupOrder: 0 } } },
      {
        test: {
          name: 'unit',
          include: ['tests/shared/**/*.test.ts', 'tests/reference/**/*.test.ts', 'tests/src/**/*.test.{ts,tsx}'],
          testTimeout: 60_000,
          sequence: { groupOrder: 1 },
        },
      },
      {
        test: {
          name: 'api',
          include: ['tests/server/**/*.test.ts', 'tests/drizzle/**/*.test.ts', 'tests/collab/**/*.test.ts'],
          globalSetup: ['tests/support/global-database.ts'],
          testTimeout: 120_000,
          hookTimeout: 120_000,
          sequence: { groupOrder: 2 },
        },
      },
      {
        test: {
          name: 'browser',
          include: ['tests/browser/**/*.test.ts'],
          globalSetup: ['tests/support/global-database.ts'],
          testTimeout: 300_000,
          hookTimeout: 300_000,
          fileParallelism: false,
          sequence: { groupOrder: 3 },
        },
      },
    ],
  },
})
