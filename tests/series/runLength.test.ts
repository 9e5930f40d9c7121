import { describe, expect, it } from 'vitest'
import { ewmaLimit } from '../../src/series/ewma.ts'
import {
  averageRunLength,
  cusumRunLength,
  ewmaRunLength,
  oneSidedCusumRunLength,
  shewhartRunLength,
} from '../../src/series/runLength.ts'
import { seeded } from './random.ts'

const close = (computed: number, published: number, part = 0.01): void => {
  expect(Math.abs(computed / published - 1), `${computed} against ${published}`).toBeLessThan(part)
}

describe('average run lengths agree with published ones within 1 %', () => {
  // Montgomery, Introduction to Statistical Quality Control (the table of tabular CUSUMs with k 0.5), computed anew.
  const SHIFTS = [0, 0.25, 0.5, 0.75, 1, 1.5, 2, 2.5, 3, 4]
  it.each([
    [4, [167.68, 74.2, 26.6, 13.3, 8.38, 4.75, 3.34, 2.62, 2.19, 1.71]],
    [5, [465.44, 139.5, 38.0, 17.1, 10.38, 5.75, 4.01, 3.11, 2.57, 2.01]],
  ])('two-sided CUSUM, k 0.5, h %d', (h, table) => {
    for (const [i, shift] of SHIFTS.entries()) close(cusumRunLength(0.5, h, shift), table[i]!)
  })
  it('one-sided CUSUM, k 0.5: 335.4 for h 4 and 930.9 for h 5', () => {
    close(oneSidedCusumRunLength(0.5, 4), 335.4, 0.001)
    close(oneSidedCusumRunLength(0.5, 5), 930.9, 0.001)
  })
  // Lucas & Saccucci, Technometrics 32 (1990) 1: designs of ARL0 500, with steady limits; the columns computed anew.
  it.each([
    [0.4, 3.054, [499.95, 223.7, 71.2, 14.3, 3.52, 2.02]],
    [0.25, 2.998, [499.8, 170.3, 48.3, 11.1, 3.61, 2.26]],
    [0.2, 2.962, [499.7, 150.2, 41.8, 10.5, 3.74, 2.38]],
    [0.1, 2.814, [499.6, 106.3, 31.3, 10.3, 4.36, 2.87]],
    [0.05, 2.615, [499.9, 84.0, 28.8, 11.4, 5.22, 3.5]],
  ])('EWMA, λ %d, L %d, steady limits', (lambda, l, table) => {
    for (const [i, shift] of [0, 0.25, 0.5, 1, 2, 3].entries())
      close(ewmaRunLength(lambda, l, shift, { limits: 'steady' }), table[i]!)
  })
  it('Shewhart 3σ: 370.4 in control, 155.22, 43.89, 14.97, 6.30, 2.00 after shifts of 0.5 to 3σ', () => {
    for (const [i, arl] of [370.4, 155.22, 43.89, 14.97, 6.3].entries()) close(shewhartRunLength(3, i / 2), arl, 0.001)
    close(shewhartRunLength(3, 3), 2.0, 0.001)
  })
})

describe('limits that widen with the first points', () => {
  it('shorten the run: as simulated, within 3 %', () => {
    const { normal } = seeded(11)
    const run = (lambda: number, l: number): number => {
      let z = 0
      for (let n = 1; ; n++) {
        z = lambda * normal() + (1 - lambda) * z
        if (Math.abs(z) > ewmaLimit(n, 1, lambda, l)) return n
      }
    }
    const runs = 6000
    let sum = 0
    for (let i = 0; i < runs; i++) sum += run(0.1, 2.3)
    const computed = ewmaRunLength(0.1, 2.3)
    close(computed, sum / runs, 0.03)
    expect(computed).toBeLessThan(ewmaRunLength(0.1, 2.3, 0, { limits: 'steady' }))
  })
  it('are the steady ones where λ is 1, a Shewhart chart', () => close(ewmaRunLength(1, 3), shewhartRunLength(3), 1e-6))
})

describe('a design', () => {
  it('has the run length of its chart, and none where tests are named', () => {
    expect(averageRunLength({ chart: 'cusum', k: 0.5, h: 5 })).toBe(cusumRunLength(0.5, 5))
    expect(averageRunLength({ chart: 'ewma', lambda: 0.2, l: 3 })).toBe(ewmaRunLength(0.2, 3))
    expect(averageRunLength({ chart: 'shewhart', l: 3, tests: [] })).toBe(shewhartRunLength(3))
    expect(averageRunLength({ chart: 'shewhart', l: 3, tests: ['nelson-2'] })).toBeNull()
  })
})
