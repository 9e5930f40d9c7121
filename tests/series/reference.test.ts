import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { occasionsOf, referenceOf, type SpectrumRow, typedReference, verdictOf } from '../../src/series/index.ts'
import { seeded } from './random.ts'

const HOUR = 3_600_000
const row = (spectrum: number, measuredAt: number, nu1: number | null, u: number | null = 2): SpectrumRow => ({
  spectrum,
  measuredAt,
  receivedAt: measuredAt + 60_000,
  quantities: { nu1: [nu1, u] },
  absorbanceAt: (nm) => (nm < 800 ? nm / 1000 : null),
})
const series = (values: readonly number[], u: number | null = 2) =>
  occasionsOf(
    values.map((x, i) => row(i + 1, i * 6 * HOUR, x, u)),
    null,
  )

describe('occasions', () => {
  it('average the replicates measured within a quarter of an hour of the first', () => {
    const rows = [row(1, 0, 10), row(2, 5 * 60_000, 14), row(3, 15 * 60_000, 12), row(4, 16 * 60_000, 50)]
    const [first, second, ...others] = occasionsOf(rows, 15 * 60_000)
    expect(first).toMatchObject({ at: 0, receivedAt: 16 * 60_000, spectra: [1, 2, 3], values: { nu1: 12 } })
    expect(first!.u.nu1).toBeCloseTo(2 / Math.sqrt(3), 12)
    expect(second).toMatchObject({ spectra: [4], values: { nu1: 50 }, u: { nu1: 2 } })
    expect(others).toEqual([])
    expect(first!.absorbanceAt(575)).toBeCloseTo(0.575, 12)
    expect(first!.absorbanceAt(900)).toBeNull()
  })
  it('without replicates are the spectra themselves', () => {
    expect(occasionsOf([row(1, 0, 10), row(2, 1, 14)], null).map(({ spectra }) => spectra)).toEqual([[1], [2]])
  })
  it('leave out replicates that lack a value', () => {
    const [one] = occasionsOf([row(1, 0, 10), row(2, 1, null, null), row(3, 2, 10)], 1000)
    expect(one!.values.nu1).toBe(10)
    expect(one!.u.nu1).toBeCloseTo(Math.SQRT2, 12)
    expect(occasionsOf([row(1, 0, null, null)], 1000)[0]!.values.nu1).toBeNull()
  })
  it('do not depend on the order of the rows', () => {
    const rows = [0, 1, 7, 8, 30].map((at, i) => row(i, at * 60_000, i))
    const plain = (list: readonly SpectrumRow[]) =>
      occasionsOf(list, 300_000).map(({ at, values, u }) => ({ at, values, u }))
    fc.assert(
      fc.property(fc.shuffledSubarray(rows, { minLength: 5 }), (shuffled) => {
        expect(plain(shuffled)).toEqual(plain(rows))
      }),
    )
  })
})

describe('the reference', () => {
  it('gathers until its occasions are there, then is frozen', () => {
    expect(referenceOf(series([1, 2, 3]), 5)).toEqual({ kind: 'gathering', have: 3, need: 5 })
    const five = [19530, 19533, 19528, 19531, 19529]
    const frozen = referenceOf(series(five), 5)
    expect(frozen).toMatchObject({ kind: 'ready', values: { nu1: 19530.2 }, occasions: 5, until: 24 * HOUR })
    expect(referenceOf(series([...five, 19000, 18000]), 5)).toMatchObject({ values: { nu1: 19530.2 } })
  })
  it('knows the uncertainty of its mean: larger of predicted and observed', () => {
    const state = referenceOf(series([10, 10, 10, 10]), 4)
    expect(state.kind === 'ready' && state.u.nu1).toBeCloseTo(1, 12)
    const scattered = referenceOf(series([0, 20, 0, 20]), 4)
    expect(scattered.kind === 'ready' && scattered.u.nu1).toBeCloseTo(Math.sqrt(400 / 3) / 2, 10)
  })
  it('is refused while its occasions have a slope, unless a person approves them', () => {
    const drifting = series([19530, 19510, 19490, 19470, 19450])
    const state = referenceOf(drifting, 5)
    expect(state).toMatchObject({ kind: 'refused' })
    expect(state.kind === 'refused' && state.why).toContain('nu1 moves by -80 cm^-1 a day')
    expect(referenceOf(drifting, 5, { approved: true }).kind).toBe('ready')
  })
  it('of a steady sample is refused about once in a hundred', () => {
    const random = seeded(7)
    const runs = 2000
    for (const u of [2, null]) {
      let refused = 0
      for (let i = 0; i < runs; i++)
        if (
          referenceOf(
            series(
              Array.from({ length: 5 }, () => 19530 + 2 * random.normal()),
              u,
            ),
            5,
          ).kind === 'refused'
        )
          refused++
      // Binomial, p 0.01: mean 20, standard deviation 4.4; where scatter is far above u the other branch adds a little.
      expect(refused / runs, `u ${u}`).toBeGreaterThan(0.004)
      expect(refused / runs, `u ${u}`).toBeLessThan(0.02)
    }
  })
  it('leaves out what fewer than half of its occasions have', () => {
    const rows = [row(1, 0, 10), row(2, 1, null), row(3, 2, null)]
    expect(referenceOf(occasionsOf(rows, null), 3)).toMatchObject({ kind: 'ready', values: { nu1: null } })
  })
  it('may be typed in', () => {
    expect(typedReference({ nu1: [19530, 15] })).toMatchObject({ values: { nu1: 19530 }, u: { nu1: 15 }, until: null })
  })
})

describe('the verdict', () => {
  const criteria = { max1: { pass: [19268, 19802], look: [19380, 19686] } } as const
  it.each([
    [19500, 'pass'],
    [19268, 'look'],
    [19700, 'look'],
    [19803, 'fail'],
    [null, null],
  ])('on a maximum at %s is %s', (max1, verdict) => expect(verdictOf({ max1: [max1, 1] }, criteria)).toBe(verdict))
  it('is none without criteria, and fails by one quantity whatever another lacks', () => {
    expect(verdictOf({ max1: [1, 1] }, {})).toBeNull()
    expect(verdictOf({ max1: [1, 1] }, { ...criteria, nu1: { pass: [0, 1], look: null } })).toBe('fail')
  })
})
