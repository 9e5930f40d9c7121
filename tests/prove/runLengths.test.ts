import { describe, expect, it } from 'vitest'
import { type ChartDesign, chartStep, learn, startChart } from '../../src/series/chart.ts'
import { CUSUM_START, cusumSignals, cusumStep } from '../../src/series/cusum.ts'
import { ewmaLimit, ewmaStart, ewmaStep } from '../../src/series/ewma.ts'
import { shewhartSignals } from '../../src/series/shewhart.ts'
import { seeded } from '../series/random.ts'

/**
 * Average run lengths by simulation against the published and computed ones: Montgomery's table for the CUSUM;
 * Lucas & Saccucci (1990) for the EWMA designs of ARL0 500; C. W. Champ and W. H. Woodall, Technometrics 29 (1987) 393 (from memory) for the Western Electric rules
 * (91.75; 225.44 for rules 1 + 2 and 152.73 for 1 + 4 from memory); 1/p for single points. Allowed: 3 %.
 */
const average = (runs: number, seed: number, run: (next: () => number) => number): number => {
  const { normal } = seeded(seed)
  let sum = 0
  for (let i = 0; i < runs; i++) sum += run(normal)
  return sum / runs
}

const cusumRun = (shift: number, h: number) => (next: () => number) => {
  let state = CUSUM_START
  for (let n = 1; ; n++) {
    state = cusumStep(state, next() + shift, 0, 0.5)
    if (cusumSignals(state, h)) return n
  }
}
const ewmaRun = (shift: number, lambda: number, l: number) => (next: () => number) => {
  const limit = ewmaLimit(Infinity, 1, lambda, l)
  let state = ewmaStart(0)
  for (let n = 1; ; n++) {
    state = ewmaStep(state, next() + shift, lambda)
    if (Math.abs(state.z) > limit) return n
  }
}
const shewhartRun = (shift: number, tests: readonly string[]) => (next: () => number) => {
  const z: number[] = []
  for (let n = 1; ; n++) {
    z.push(next() + shift)
    if (z.length > 8) z.shift()
    if (shewhartSignals(z, tests).length > 0) return n
  }
}

const within = (simulated: number, published: number, part: number) => {
  process.stdout.write(
    `${expect.getState().currentTestName}: simulated ${simulated.toFixed(2)}, published ${published}\n`,
  )
  expect(Math.abs(simulated / published - 1)).toBeLessThan(part)
}

describe('run lengths within 3 %', () => {
  it.each([
    [4, 0, 167.68],
    [4, 0.5, 26.6],
    [4, 1, 8.38],
    [4, 2, 3.34],
    [5, 0, 465.44],
    [5, 0.5, 38.0],
    [5, 1, 10.38],
    [5, 2, 4.01],
  ])('CUSUM k 0.5, h %d, shift %d σ', (h, shift, arl) => within(average(20_000, 1, cusumRun(shift, h)), arl, 0.03))
  it.each([
    [0.4, 3.054, 0, 499.95],
    [0.25, 2.998, 0, 499.8],
    [0.2, 2.962, 0, 499.7],
    [0.1, 2.814, 0, 499.6],
    [0.05, 2.615, 0, 499.9],
    [0.1, 2.814, 1, 10.3],
    [0.1, 2.814, 0.5, 31.3],
  ])('EWMA λ %d, L %d, shift %d σ', (lambda, l, shift, arl) =>
    within(average(20_000, 2, ewmaRun(shift, lambda, l)), arl, 0.03),
  )
  it.each<[readonly number[], number, number]>([
    [[1], 0, 370.4],
    [[1], 1, 43.89],
    [[1], 2, 6.3],
    [[1, 2], 0, 225.44],
    [[1, 4], 0, 152.73],
    [[1, 2, 3, 4], 0, 91.75],
  ])('Western Electric %j, shift %d σ', (rules, shift, arl) => {
    const tests = rules.map((n) => `western-electric-${n}`)
    within(average(20_000, 3, shewhartRun(shift, tests)), arl, 0.03)
  })
})

/** Run length of the chart as the rules use it: `n` reference values, then all that follows. */
const selfStartingRun = (design: ChartDesign, n: number, u: number | null) => (next: () => number) => {
  let state = startChart(null)
  for (let i = 0; i < n; i++) state = learn(state, next(), u)
  for (let i = 1; ; i++) {
    state = chartStep(state, design, next(), u)
    if (state.newest?.signals) return i
  }
}

describe('self-starting from five reference values keeps the run length of the design', () => {
  it.each<[string, ChartDesign, number]>([
    ['CUSUM k 0.5, h 4', { chart: 'cusum', k: 0.5, h: 4 }, 167.68],
    ['CUSUM k 0.5, h 5', { chart: 'cusum', k: 0.5, h: 5 }, 465.44],
    ['EWMA λ 0.4, L 3.054', { chart: 'ewma', lambda: 0.4, l: 3.054 }, 500],
    ['Shewhart 3σ', { chart: 'shewhart', l: 3, tests: [] }, 370.4],
  ])('%s, σ from the scatter alone: within 10 %', (_, design, arl) =>
    within(average(10_000, 4, selfStartingRun(design, 5, null)), arl, 0.1),
  )
  it.each<[string, ChartDesign, number]>([
    ['CUSUM k 0.5, h 4', { chart: 'cusum', k: 0.5, h: 4 }, 167.68],
    ['CUSUM k 0.5, h 5', { chart: 'cusum', k: 0.5, h: 5 }, 465.44],
  ])('%s, with uncertainties that are right: the larger σ makes it no shorter', (_, design, arl) => {
    const simulated = average(10_000, 5, selfStartingRun(design, 5, 1))
    process.stdout.write(`${expect.getState().currentTestName}: simulated ${simulated.toFixed(1)}, design ${arl}\n`)
    expect(simulated).toBeGreaterThan(0.97 * arl)
  })
})

describe('correlation between occasions', () => {
  /** First-order autoregression with variance 1. */
  const correlated = (phi: number, next: () => number) => {
    let x = next()
    return () => {
      x = phi * x + Math.sqrt(1 - phi * phi) * next()
      return x
    }
  }
  const design: ChartDesign = { chart: 'cusum', k: 0.5, h: 5 }
  it('of 0.4 cuts the run length of a plain CUSUM from 465 to about 70', () => {
    const simulated = average(5000, 6, (next) => cusumRun(0, 5)(correlated(0.4, next)))
    process.stdout.write(`plain CUSUM, correlation 0.4: ${simulated.toFixed(1)}\n`)
    expect(simulated).toBeGreaterThan(60)
    expect(simulated).toBeLessThan(80)
  })
  it.each([100, 200])('of 0.4 that %d reference occasions show makes the run length no shorter than designed', (n) => {
    const simulated = average(2000, 7, (next) => selfStartingRun(design, n, null)(correlated(0.4, next)))
    process.stdout.write(`self-starting after ${n}, correlation 0.4: ${simulated.toFixed(1)}\n`)
    expect(simulated).toBeGreaterThan(465.44)
  })
})
