import { expect, it } from 'vitest'
import { efficiencyOver } from './efficiency.ts'

it('two bands: the median error is within 15 % of the Cramér–Rao bound, and 95 % intervals of Δo and B cover the truth as often as 200 spectra can tell', () => {
  const { efficiency, deltaCovered, bCovered, unlike } = efficiencyOver(200, 404)
  expect(unlike).toBeLessThanOrEqual(1)
  expect(efficiency).toBeGreaterThan(0.85)
  expect(efficiency).toBeLessThan(1.15)
  for (const share of [deltaCovered, bCovered]) {
    // 95 % within three standard deviations of a count of 200; the long proof narrows it
    expect(share).toBeGreaterThan(0.904)
    expect(share).toBeLessThan(0.996)
  }
}, 60_000)
