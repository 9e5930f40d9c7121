import { defineConfig } from 'vitest/config'

export default defineConfig({
  test: { pool: 'forks', include: ['tests/prove/**/*.test.ts'], testTimeout: 1_800_000, passWithNoTests: false },
})
