import { defineConfig } from 'vitest/config'

export default defineConfig({
  test: {
    pool: 'forks',
    setupFiles: ['tests/setup.ts'], // native addons do not bear worker threads
    include: ['tests/**/*.test.ts'],
    exclude: ['tests/prove/**'],
    testTimeout: 30_000,
  },
})
