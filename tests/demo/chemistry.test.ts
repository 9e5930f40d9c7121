import { expect, test } from 'vitest'
import { CHLOROPENTAAMMINE, measure, partReplaced } from '../../src/demo/chemistry.ts'
import { DRIFTING, UV1, UV2 } from '../../src/demo/plan.ts'

test('half of the chloride is replaced after one half-life, ln 2 / k', () => {
  expect(partReplaced((Math.LN2 / 8e-6) * 1000)).toBeCloseTo(0.5, 12)
})

test('a measurement can be repeated to the last digit, and differs from the next by noise only', () => {
  const measurement = { sample: 'X', at: 0, contents: [[CHLOROPENTAAMMINE, 0.012]] as const }
  expect(measure(measurement, 1)).toEqual(measure(measurement, 1))
  const [a, b] = [measure(measurement, 1).absorbance, measure(measurement, 2).absorbance]
  const spread = Math.sqrt(a.reduce((sum, value, i) => sum + (value - b[i]!) ** 2, 0) / a.length)
  expect(spread).toBeGreaterThan(2e-4)
  expect(spread).toBeLessThan(6e-3)
})

test('the curve has its maximum at the band and the height that ε·c·l gives it', () => {
  const { nm, absorbance } = measure({ sample: 'X', at: 0, contents: [[CHLOROPENTAAMMINE, 0.012]] }, 7)
  const visible = absorbance.slice(nm.indexOf(450))
  const top = Math.max(...visible)
  expect(Math.abs(nm[nm.indexOf(450) + visible.indexOf(top)]! - 512)).toBeLessThan(6)
  expect(top).toBeGreaterThan(36 * 0.012)
  expect(top).toBeLessThan(36 * 0.012 + 0.03)
})

test('three samples are measured four times a day for six days, and no two at one time on one instrument', () => {
  for (const measurements of [UV1, UV2])
    expect(new Set(measurements.map(({ at }) => at)).size).toBe(measurements.length)
  expect(UV1.filter(({ sample }) => sample === DRIFTING)).toHaveLength(24)
  expect(new Set([...UV1, ...UV2].map(({ at }) => new Date(at).toISOString().slice(0, 10))).size).toBe(6)
})
