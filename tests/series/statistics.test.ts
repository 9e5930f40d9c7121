import fc from 'fast-check'
import { Matrix, solve } from 'ml-matrix'
import { describe, expect, it } from 'vitest'
import { line, mean, median, sd, uOfMean } from '../../src/series/statistics.ts'

/** NIST StRD, linear regression, data set Norris (36 points x, y); data and certified values from memory. */
const NORRIS: readonly (readonly [x: number, y: number])[] = [
  ...([
    [0.2, 0.1],
    [337.4, 338.8],
    [118.2, 118.1],
    [884.6, 888.0],
    [10.1, 9.2],
    [226.5, 228.1],
  ] as const),
  ...([
    [666.3, 668.5],
    [996.3, 998.5],
    [448.6, 449.1],
    [777.0, 778.9],
    [558.2, 559.2],
    [0.4, 0.3],
  ] as const),
  ...([
    [0.6, 0.1],
    [775.5, 778.1],
    [666.9, 668.8],
    [338.0, 339.3],
    [447.5, 448.9],
    [11.6, 10.8],
  ] as const),
  ...([
    [556.0, 557.7],
    [228.1, 228.3],
    [995.8, 998.0],
    [887.6, 888.8],
    [120.2, 119.6],
    [0.3, 0.3],
  ] as const),
  ...([
    [0.3, 0.6],
    [556.8, 557.6],
    [339.1, 339.3],
    [887.2, 888.0],
    [999.0, 998.5],
    [779.0, 778.9],
  ] as const),
  ...([
    [11.1, 10.2],
    [118.3, 117.6],
    [229.2, 228.9],
    [669.1, 668.4],
    [448.9, 449.2],
    [0.5, 0.2],
  ] as const),
]

describe('straight line', () => {
  it('meets the certified values of NIST Norris to ten digits', () => {
    const fitted = line(NORRIS.map(([at, value]) => ({ at, value, u: null })))!
    expect(fitted.slope).toBeCloseTo(1.00211681802045, 11)
    expect(fitted.middle - fitted.slope * fitted.middleAt).toBeCloseTo(-0.262323073774029, 10)
    expect(fitted.uSlope).toBeCloseTo(0.429796848199937e-3, 12)
  })
  it('weighs by 1/u² as the normal equations do (ml-matrix)', () => {
    const points = NORRIS.map(([at, value], i) => ({ at, value, u: 0.5 + (i % 5) }))
    const w = points.map(({ u }) => u ** -2)
    const sum = (f: (i: number) => number) => points.reduce((all, _, i) => all + w[i]! * f(i), 0)
    const x = (i: number) => points[i]!.at
    const normal = new Matrix([
      [sum(() => 1), sum(x)],
      [sum(x), sum((i) => x(i) ** 2)],
    ])
    const right = Matrix.columnVector([sum((i) => points[i]!.value), sum((i) => x(i) * points[i]!.value)])
    const fitted = line(points)!
    expect(fitted.slope).toBeCloseTo(solve(normal, right).get(1, 0), 10)
    expect(fitted.predictedUSlope).toBeCloseTo(Math.sqrt(solve(normal, Matrix.eye(2)).get(1, 1)), 12)
    expect(fitted.uSlope).toBe(Math.max(fitted.predictedUSlope!, fitted.observedUSlope!))
  })
  it('is none through one moment', () => {
    expect(line([{ at: 1, value: 1, u: 1 }])).toBeNull()
    expect(line([1, 2].map((value) => ({ at: 5, value, u: null })))).toBeNull()
  })
  it('does not mind times counted from 1970', () => {
    const points = [0, 1, 2, 3].map((i) => ({ at: 1.77e12 + i * 21_600_000, value: 19530 + 2 * i, u: null }))
    expect(line(points)!.slope * 21_600_000).toBeCloseTo(2, 9)
  })
})

describe('mean, median, standard deviation', () => {
  /** NIST StRD univariate, NumAcc4: 1001 values 10000000.1 and .3 about 10000000.2; mean and s exact (from memory). */
  it('meet the certified values of NIST NumAcc4: mean 10000000.2, s 0.1', () => {
    const values = [10000000.2, ...Array.from({ length: 1000 }, (_, i) => (i % 2 === 0 ? 10000000.1 : 10000000.3))]
    expect(mean(values)).toBeCloseTo(10000000.2, 8)
    expect(sd(values)).toBeCloseTo(0.1, 8)
  })
  it('do not depend on the order of the values', () => {
    const list = fc.array(fc.double({ min: -1e6, max: 1e6, noNaN: true }), { minLength: 2, maxLength: 20 })
    fc.assert(
      fc.property(list, (values) => {
        const turned = values.toReversed()
        expect(mean(turned)).toBeCloseTo(mean(values), 6)
        expect(median(turned) === median(values)).toBe(true) // 0 and −0 are one number
        expect(sd(turned)).toBeCloseTo(sd(values)!, 6)
      }),
    )
  })
  it('u of a mean is the larger of the predicted and the observed', () => {
    expect(uOfMean([1, 1, 1, 1], [2, 2, 2, 2])).toBeCloseTo(1, 12)
    expect(uOfMean([0, 2, 4], [0.1, 0.1, 0.1])).toBeCloseTo(2 / Math.sqrt(3), 12)
    expect(uOfMean([5], [null])).toBeNull()
    expect(uOfMean([5], [3])).toBe(3)
    expect(uOfMean([0, 2], [null, 1])).toBeCloseTo(1, 12)
  })
})
