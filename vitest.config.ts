import { defineConfig } from 'vitest/config'

export default defineConfig({
  test: {
    pool: 'forks', // native addons do not bear worker threads
    maxWorkers: 2, // tests of the daemon wait more than they compute
    setupFiles: ['tests/setup.ts'],
    include: ['tests/**/*.test.ts'],
    exclude: ['tests/prove/**'],
    testTimeout: 30_000,
  },
})
