import { describe, expect, it } from 'vitest'
import { correlationOf, NO_SUCCESSION, succeed, widening } from '../../src/series/correlation.ts'
import { seeded } from './random.ts'

/** First-order autoregression x′ = φx + noise, variance 1, with what is added to each value. */
const series = (phi: number, n: number, seed: number, added: (i: number) => number = () => 0) => {
  const { normal } = seeded(seed)
  let x = normal()
  let successive = NO_SUCCESSION
  for (let i = 0; i < n; i++) {
    successive = succeed(successive, x + added(i))
    x = phi * x + Math.sqrt(1 - phi * phi) * normal()
  }
  return successive
}

describe('correlation between occasions', () => {
  it.each([0, 0.2, 0.4, 0.6, -0.3])('of %d is found in a long series', (phi) =>
    expect(correlationOf(series(phi, 20_000, 11))).toBeCloseTo(phi, 1),
  )
  it('is not mistaken where a series steps by two σ, or drifts by two σ over its length', () => {
    expect(Math.abs(correlationOf(series(0, 2000, 12, (i) => (i < 1000 ? 0 : 2)))!)).toBeLessThan(0.08)
    expect(Math.abs(correlationOf(series(0, 2000, 12, (i) => i / 1000))!)).toBeLessThan(0.08)
  })
  it('widens σ by √((1 + φ)/(1 − φ)) once it is significant, and never narrows it', () => {
    expect(widening(series(0.4, 20_000, 13))).toBeCloseTo(Math.sqrt(1.4 / 0.6), 1)
    expect(widening(series(0, 100, 14))).toBe(1)
    expect(widening(series(-0.5, 1000, 15))).toBe(1)
    expect(widening(series(0.9, 19, 16))).toBe(1)
  })
  it('is unknown of two values and of values that never differ', () => {
    expect(correlationOf(series(0, 2, 17))).toBeNull()
    expect(correlationOf([5, 5, 5, 5].reduce(succeed, NO_SUCCESSION))).toBeNull()
  })
})
