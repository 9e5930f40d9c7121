import { defineConfig } from 'vitest/config'

export default defineConfig({
  test: {
    pool: 'forks',
    setupFiles: ['tests/setup.ts'],
    include: ['tests/prove/**/*.test.ts'],
    testTimeout: 1_800_000,
    passWithNoTests: false,
  },
})
