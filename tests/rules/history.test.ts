import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { BEGAN, HOUR, judged, occasion, windowOf } from './fixtures.ts'

const nu1 = (...values: (number | null)[]) => windowOf(values.map((value) => ({ nu1: value })))
const rings = (when: string, window: ReturnType<typeof nu1>) => expect(judged(when, window), when).toBe('rings')

describe('windows over the newest occasions', () => {
  it('hold the one judged', () => {
    rings('mean(nu1, 2) == 5 cm^-1', nu1(100, 4, 6))
    rings('median(nu1, 3) == 6 cm^-1', nu1(6, 4, 100))
    rings('median(nu1, 4) == 5 cm^-1', nu1(6, 4, 100, 1))
  })
  it('skip occasions without the value', () => {
    rings('mean(nu1, 2) == 5 cm^-1', nu1(4, null, null, 6, null))
    rings('previous(nu1) == 4 cm^-1', nu1(4, null, null, 6))
    rings('previous(nu1) == 6 cm^-1', nu1(4, null, 6, null))
  })
  it('are gathering while fewer are there', () => {
    expect(judged('mean(nu1, 4) > 0 cm^-1', nu1(1, 2, null, 3))).toBe('gathering')
    expect(judged('sd(nu1, 2) > 0 cm^-1', nu1(1))).toBe('gathering')
  })
  it('sd has n - 1: 2.138090 for 2 4 4 4 5 5 7 9 (their sum of squares about the mean is 32)', () => {
    rings('abs(sd(nu1, 8) - sqrt(32 / 7) * 1 cm^-1) < 1e-12 cm^-1', nu1(2, 4, 4, 4, 5, 5, 7, 9))
  })
  it('count counts occasions', () => {
    rings('count(5) == 3', nu1(1, 2, 3))
    rings('count(2) == 2', nu1(1, null, 3))
    rings('count(12 h) == 3 and count(11 h) == 2', nu1(1, 2, 3, 4))
  })
})

describe('windows over a duration', () => {
  it('hold what was measured within it, both ends included', () => {
    rings('mean(nu1, 12 h) == 3 cm^-1', nu1(100, 2, 3, 4))
    rings('mean(nu1, 11 h) == 3.5 cm^-1', nu1(100, 2, 3, 4))
  })
  it('are gathering until the history is as long', () => {
    expect(judged('mean(nu1, 1 d) > 0 cm^-1', nu1(1, 2, 3, 4))).toBe('gathering')
    rings('mean(nu1, 1 d) == 3 cm^-1', nu1(1, 2, 3, 4, 5))
  })
  it('are gathering where they hold too few', () => {
    const gappy = {
      ...nu1(),
      occasions: [occasion(BEGAN, { nu1: 1 }), occasion(BEGAN + 48 * HOUR, { nu1: 5 })],
    }
    expect(judged('sd(nu1, 1 d) > 0 cm^-1', gappy)).toBe('gathering')
    rings('mean(nu1, 1 d) == 5 cm^-1', gappy)
  })
})

describe('slopes', () => {
  it('are per time, in any unit of time', () => {
    rings('abs(slope(nu1, 4) - 0.5 cm^-1/h) < 1e-9 cm^-1/h', nu1(3, 6, 9, 12))
    rings('abs(slope(nu1, 4) - 12 cm^-1/day) < 1e-9 cm^-1/d', nu1(3, 6, 9, 12))
    rings('abs(slope(nu1, 18 h) + 0.5 cm^-1 h^-1) < 1e-9 cm^-1 h^-1', nu1(12, 9, 6, 3))
  })
  it('u_slope comes from the scatter where no uncertainty is known: points 1 2 2 about their line', () => {
    // Residuals -1/6, 1/3, -1/6: variance 1/6 with one degree of freedom, over the times' spread 2 (6 h)².
    rings('abs(u_slope(nu1, 3) - sqrt(1 / 12) / 6 * 1 cm^-1/h) < 1e-12 cm^-1/h', nu1(1, 2, 2))
  })
  it('of one moment are gathering', () => {
    const moment = { ...nu1(), occasions: [1, 2, 3].map((x) => occasion(BEGAN, { nu1: x })) }
    expect(judged('slope(nu1, 3) > 0 cm^-1/h', moment)).toBe('gathering')
  })
})

describe('runs', () => {
  it('count the newest consecutive occasions beyond a level', () => {
    rings('run_above(nu1, 3 cm^-1) == 2', nu1(9, 9, 1, 4, 5))
    rings('run_below(nu1, 3 cm^-1) == 0', nu1(9, 9, 1, 4, 5))
    rings('run_below(nu1, 3 cm^-1) == 2', nu1(9, 1, null, 2))
    rings('run_above(nu1, 4 cm^-1) == 0', nu1(9, 4))
  })
  it('are undecided with their level, and without any value', () => {
    expect(judged('run_above(nu1, reference(nu1)) > 3', nu1(1, 2))).toBe('gathering')
    expect(judged('run_above(nu1, 2 cm^-1) > 3', nu1(null, null))).toBe('missing')
  })
})

it('a window statistic does not depend on the order of its values', () => {
  const values = fc.array(fc.integer({ min: 1, max: 1000 }), { minLength: 3, maxLength: 8 })
  fc.assert(
    fc.property(
      values.chain((list) => fc.tuple(fc.constant(list), fc.shuffledSubarray(list, { minLength: list.length }))),
      ([list, shuffled]) => {
        const n = list.length
        for (const statistic of ['mean', 'median', 'sd']) {
          const sorted = list.toSorted((a, b) => a - b)
          const mean = list.reduce((sum, x) => sum + x, 0) / n
          const expected = {
            mean,
            median: (sorted[(n - 1) >> 1]! + sorted[n >> 1]!) / 2,
            sd: Math.sqrt(list.reduce((sum, x) => sum + (x - mean) ** 2, 0) / (n - 1)),
          }[statistic]!
          const when = `abs(${statistic}(nu1, ${n}) - ${expected} cm^-1) < 1e-9 cm^-1`
          expect(judged(when, nu1(...shuffled))).toBe('rings')
        }
      },
    ),
    { numRuns: 100 },
  )
})
