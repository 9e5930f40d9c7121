import jstat from 'jstat'
import { describe, expect, it } from 'vitest'
import { chartStep, learn, startChart } from '../../src/series/chart.ts'
import { CUSUM_START, type Cusum, cusumNewMean, cusumSignals, cusumStep } from '../../src/series/cusum.ts'
import { type Ewma, ewmaLimit, ewmaStart, ewmaStep } from '../../src/series/ewma.ts'
import { normalOfStudent, standardise, startEstimates, takeIn } from '../../src/series/selfStarting.ts'
import { shewhartSignals } from '../../src/series/shewhart.ts'

/** D. C. Montgomery, Introduction to Statistical Quality Control, the worked example: target 10, σ 1, K 0.5, H 5. */
const DATA = [
  ...[9.45, 7.99, 9.29, 11.66, 12.16, 10.18, 8.04, 11.46, 9.2, 10.34, 9.03, 11.47, 10.51, 9.4, 10.08],
  ...[9.37, 10.62, 10.31, 8.52, 10.84, 10.9, 9.33, 12.29, 11.5, 10.6, 11.08, 10.38, 11.62, 11.31, 10.52],
]
const C_HIGH = [
  ...[0, 0, 0, 1.16, 2.82, 2.5, 0.04, 1.0, 0, 0, 0, 0.97, 0.98, 0, 0, 0, 0.12, 0, 0, 0.34, 0.74, 0, 1.79, 2.79, 2.89],
  ...[3.47, 3.35, 4.47, 5.28, 5.3],
]
const C_LOW = [
  ...[0.05, 1.56, 1.77, 0, 0, 0, 1.46, 0, 0.3, 0, 0.47, 0, 0, 0.1, 0, 0.13, 0, 0, 0.98, 0, 0, 0.17],
  ...[0, 0, 0, 0, 0, 0, 0, 0],
]

/** The states of a chart after each point of the example. */
const along = <S>(start: S, step: (before: S, x: number) => S): readonly S[] => {
  const states: S[] = []
  for (const x of DATA) states.push(step(states.at(-1) ?? start, x))
  return states
}

describe('tabular CUSUM on the worked example', () => {
  const states = along<Cusum>(CUSUM_START, (before, x) => cusumStep(before, x, 10, 0.5))
  it('has the printed sums', () => {
    states.forEach(({ high, low }, i) => {
      expect(high, `C+ ${i + 1}`).toBeCloseTo(C_HIGH[i]!, 8)
      expect(low, `C- ${i + 1}`).toBeCloseTo(C_LOW[i]!, 8)
    })
  })
  it('signals first at 29, seven points after the shift began, and puts the new mean at 11.25', () => {
    expect(states.findIndex((state) => cusumSignals(state, 5)) + 1).toBe(29)
    expect(states[28]!.nHigh).toBe(7)
    expect(cusumNewMean(states[28]!, 10, 0.5)).toBeCloseTo(11.254, 3)
  })
})

describe('EWMA on the worked example, λ 0.1, L 2.7', () => {
  const states = along<Ewma>(ewmaStart(10), (before, x) => ewmaStep(before, x, 0.1))
  it.each([
    [1, 9.945],
    [2, 9.7495],
    [3, 9.70355],
    [28, 10.57314],
    [29, 10.64682],
    [30, 10.63414],
  ])('z%i is %f (recomputed)', (i, z) => expect(states[i - 1]!.z).toBeCloseTo(z, 5))
  it('has the limits 9.73/10.27, 9.64/10.36 and in the end 9.38/10.62', () => {
    expect(ewmaLimit(1, 1, 0.1, 2.7)).toBeCloseTo(0.27, 10)
    expect(ewmaLimit(2, 1, 0.1, 2.7)).toBeCloseTo(0.36, 2)
    expect(ewmaLimit(Infinity, 1, 0.1, 2.7)).toBeCloseTo(0.619422, 6)
  })
  it('is outside first at 29', () => {
    const outside = states.findIndex(({ z, i }) => Math.abs(z - 10) > ewmaLimit(i, 1, 0.1, 2.7))
    expect(outside + 1).toBe(29)
  })
})

describe('Shewhart tests signal at the point that completes the pattern', () => {
  const zeros = (n: number) => Array.from({ length: n }, () => 0)
  const firstSignal = (test: string, z: readonly number[]) => {
    const i = z.findIndex((_, k) => shewhartSignals(z.slice(0, k + 1), [test]).length > 0)
    return i < 0 ? null : i + 1
  }
  // Western Electric (1956) and Nelson (1984) as restated in facts of the trade: the counts are those of the rules.
  it.each<[string, readonly number[], number | null]>([
    ['western-electric-1', [0, 3.1], 2],
    ['western-electric-1', [0, -3, 3], null],
    ['western-electric-2', [2.1, 0, 2.1], 3],
    ['western-electric-2', [2.1, 0, 0, 2.1], null],
    ['western-electric-2', [2.1, -2.1, 0], null],
    ['western-electric-3', [1.1, 1.1, 0, 1.1, 1.1], 5],
    ['western-electric-3', [1.1, 1.1, 0, 0, 1.1, 1.1], null],
    ['western-electric-4', [1, 1, 1, 1, 1, 1, 1, 1], 8],
    ['western-electric-4', [1, 1, 1, 1, -1, 1, 1, 1, 1], null],
    ['nelson-1', [-3.1], 1],
    ['nelson-2', [1, 1, 1, 1, 1, 1, 1, 1, 1], 9],
    ['nelson-3', [5, 4, 3, 2, 1, 0], 6],
    ['nelson-3', [1, 2, 3, 4, 5], null],
    ['nelson-3', [1, 2, 3, 3, 4, 5, 6], null],
    ['nelson-4', [1, -1, 1, -1, 1, -1, 1, -1, 1, -1, 1, -1, 1, -1], 14],
    ['nelson-4', [1, -1, 1, -1, 1, -1, 1, -1, 1, -1, 1, -1, -1, 1], null],
    ['nelson-5', [-2.1, -2.1], 2],
    ['nelson-6', [-1.1, -1.1, -1.1, -1.1], 4],
    ['nelson-7', zeros(15), 15],
    ['nelson-7', zeros(14), null],
    ['nelson-8', [2, 2, 2, -2, 2, 2, 2, 2], 8],
    ['nelson-8', [2, 2, 2, 2, 2, 2, 2, 2], null],
  ])('%s on %j', (test, z, at) => expect(firstSignal(test, z)).toBe(at))
})

describe('self-starting standardisation', () => {
  it('turns Student deviates into normal ones of the same tail (jstat): to 0.04 up to 3, towards zero above 1.5', () => {
    for (const freedom of [3, 4, 5, 10, 30, 100])
      for (const t of [0.1, 0.5, 1, 2, 3, 4, 5]) {
        const exact = jstat.normal.inv(jstat.studentt.cdf(t, freedom), 0, 1)
        if (exact > 3) continue
        const error = normalOfStudent(t, freedom) - exact
        expect(Math.abs(error), `t ${t}, ν ${freedom}`).toBeLessThan(0.04)
        if (exact > 1.5) expect(error, `t ${t}, ν ${freedom}`).toBeLessThan(0)
        expect(normalOfStudent(-t, freedom)).toBe(-normalOfStudent(t, freedom))
      }
  })
  const estimates = [10, 12, 11, 9, 13].reduce((all, x) => takeIn(all, x, 2), startEstimates(null))
  it('takes the larger of observed scatter and predicted repeatability as σ', () => {
    // s² of 10 12 11 9 13 is 2.5; the uncertainties say 2.
    expect(standardise(estimates, 11, 2)!.sigma).toBeCloseTo(2, 12)
    expect(standardise(estimates, 15, 2)!.z).toBeCloseTo(4 / (2 * Math.sqrt(1.2)), 12)
    const sure = [10, 12, 11, 9, 13].reduce((all, x) => takeIn(all, x, 0.1), startEstimates(null))
    expect(standardise(sure, 11, 0.1)!.sigma).toBeCloseTo(Math.sqrt(2.5), 12)
  })
  it('keeps a typed target and widens σ by its uncertainty', () => {
    const typed = takeIn(startEstimates({ value: 10, u: 1.5 }), 11, 2)
    expect(standardise(typed, 20, 2)!.z).toBeCloseTo(10 / 2.5, 12)
  })
  it('has nothing to say before it knows a σ', () => {
    expect(standardise(startEstimates(null), 1, 1)).toBeNull()
    expect(standardise(takeIn(startEstimates(null), 1, null), 1, null)).toBeNull()
  })
  it('does not learn from what signals: a change is not averaged away', () => {
    const design = { chart: 'cusum', k: 0.5, h: 5 } as const
    let state = [0, 1, -1, 0.5, -0.5].reduce((all, x) => learn(all, x, 1), startChart(null))
    for (let i = 0; i < 200; i++) state = chartStep(state, design, 6, 1)
    expect(state.newest!.signals).toBe(true)
    expect(state.newest!.target).toBeLessThan(3)
  })
})
