import { defineConfig } from 'vitest/config'

export default defineConfig({
  test: {
    pool: 'forks', // native addons do not bear worker threads
    setupFiles: ['tests/setup.ts'],
    include: ['tests/**/*.test.ts'],
    exclude: ['tests/prove/**'],
    testTimeout: 30_000,
  },
})
