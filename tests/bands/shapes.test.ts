import { describe, expect, it } from 'vitest'
import { KINDS } from './shapes.ts'
import { tallyOf } from './tally.ts'

describe('bands of shapes that the recipe does not hold', () => {
  for (const kind of KINDS)
    it(`${kind}: never "no band", nearly every band found, and its place within 2 u of recipes and repeatability together`, () => {
      const { bands, found, covered, unfitted } = tallyOf(kind, 15, 77)
      expect(unfitted).toBe(0)
      expect(found / bands).toBeGreaterThan(0.93)
      expect(covered / found).toBeGreaterThan(0.8)
    }, 60_000)
})
