/**
 * Spectra between two compounds. Made-up ones have known shares; the measured series (open data, TENDQ_REFERENCE_DATA) was charged at
 * constant current, so that the share of vanadium(II) is linear in the charge, and its publication says that fractions do not quite add up and curves
 * cross between 475 and 511 nm and between 535 and 560 nm.
 */
import { describe, expect, it } from 'vitest'
import { mixtureOf } from '../../src/analysis/index.ts'
import { fitTogether } from '../../src/bands/index.ts'
import { bandAt } from '../../src/bands/shapes.ts'
import { CHARGES, hasReferenceData, prepared, readVanadium } from '../bands/measured.ts'
import { gaussianNoise, generator, simulate } from '../bands/simulated.ts'

const normal = gaussianNoise(generator(8))
const gaussian = (x: number, p: number, w: number, h: number) => h * bandAt({ kind: 'gaussian' }, p, w, x)
const reactant = (x: number) => gaussian(x, 18000, 3400, 0.5) + gaussian(x, 25000, 3900, 0.45)
const product = (x: number) => gaussian(x, 20200, 3500, 0.6) + gaussian(x, 27500, 4000, 0.4)

describe('shares of two compounds', () => {
  const parts = [0, 0.1, 0.25, 0.5, 0.8, 1]
  const series = (lost: number) =>
    parts.map((part) =>
      simulate((x) => (1 - part) * reactant(x) + (1 - lost) ** part * part * product(x), 1e-3, normal),
    )

  it('are found within their uncertainty, add up, and the isosbestic points hold', () => {
    const mixture = mixtureOf(series(0))
    if (mixture.kind === 'none') throw new Error(mixture.why)
    mixture.shares.slice(1, -1).forEach(({ first, uFirst, last, uLast }, s) => {
      expect(Math.abs(last - parts[s + 1]!)).toBeLessThan(4 * uLast)
      expect(Math.abs(first - 1 + parts[s + 1]!)).toBeLessThan(4 * uFirst)
      expect(uLast).toBeLessThan(0.01)
    })
    expect(mixture.flags).toEqual([])
    expect(mixture.crossings.length).toBeGreaterThanOrEqual(2)
    // where both curves are equal, by bisection of the formulas
    let [low, high] = [18000, 20200]
    for (let round = 0; round < 60; round++) {
      const middle = (low + high) / 2
      if (reactant(middle) > product(middle)) low = middle
      else high = middle
    }
    const nm = 1e7 / low
    expect(mixture.crossings.some(({ fromNm, toNm, holds }) => holds && fromNm - 0.5 < nm && nm < toNm + 0.5)).toBe(
      true,
    )
  })

  it('of two spectra are not told', () => {
    expect(mixtureOf(series(0).slice(0, 2)).kind).toBe('none')
  })
})

it('where a third compound comes and goes, that is said', () => {
  const amounts = [0, 0.3, 0.5, 0.3, 0]
  const between = amounts.map((third, s) =>
    simulate(
      (x) =>
        (1 - s / 4) * (1 - third) * reactant(x) +
        (s / 4) * (1 - third) * product(x) +
        third * gaussian(x, 15500, 2500, 0.4),
      1e-3,
      normal,
    ),
  )
  const mixture = mixtureOf(between)
  if (mixture.kind === 'none') throw new Error(mixture.why)
  expect(mixture.flags).toEqual(expect.arrayContaining(['no-closure', 'misfit']))
})

it('one band a species: positions and widths shared by a series are as sharp as the series is long', () => {
  const heights = [0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9]
  const series = heights.map((h) =>
    simulate((x) => gaussian(x, 17400, 3600, h) + gaussian(x, 24600, 3900, 0.5), 1e-3, normal, [330, 850, 1]),
  )
  const band = (positionPerCm: number) => ({
    shape: { kind: 'gaussian' as const },
    kind: 'band' as const,
    positionPerCm,
    positionBoundsPerCm: [positionPerCm - 2000, positionPerCm + 2000] as const,
    widthPerCm: 3000,
    widthBoundsPerCm: [1200, 7000] as const,
    ratio: 1,
  })
  const of = (spectra: typeof series) => {
    const fit = fitTogether(spectra, [[band(17000)], [band(25200)]], [12000, 30000])
    if (fit.kind === 'unfitted') throw new Error(fit.why)
    return fit
  }
  const all = of(series)
  const [[nu1], [nu2]] = all.species as [[(typeof all.species)[0][0]], [(typeof all.species)[0][0]]]
  expect(Math.abs(nu1.positionPerCm - 17400)).toBeLessThan(4 * nu1.uPositionPerCm!)
  expect(Math.abs(nu2.positionPerCm - 24600)).toBeLessThan(4 * nu2.uPositionPerCm!)
  expect(nu2.uPositionPerCm!).toBeLessThan(0.5 * of(series.slice(0, 1)).species[1]![0]!.uPositionPerCm!)
  all.spectra.forEach(({ amounts, uAmounts }, s) => {
    expect(Math.abs(amounts[0]! - heights[s]!)).toBeLessThan(Math.max(4 * uAmounts[0]!, 0.003))
  })
})

describe.skipIf(!hasReferenceData)('the measured vanadium series (TENDQ_REFERENCE_DATA names its folder)', () => {
  it('the share of vanadium(II) is linear in the charge with r² ≥ 0.995, and what does not quite fit is said', () => {
    const mixture = mixtureOf(CHARGES.map((percent) => prepared(readVanadium(percent))))
    if (mixture.kind === 'none') throw new Error(mixture.why)
    const charges = CHARGES.map(Number)
    expect(
      squareOfCorrelation(
        charges,
        mixture.shares.map(({ last }) => last),
      ),
    ).toBeGreaterThanOrEqual(0.995)
    expect(mixture.flags).toEqual(expect.arrayContaining(['no-closure', 'wandering-crossings']))
    const wandering = (from: number, to: number) =>
      mixture.crossings.some(
        ({ fromNm, toNm, holds }) => !holds && Math.abs(fromNm - from) < 3 && Math.abs(toNm - to) < 3,
      )
    expect(wandering(475, 511)).toBe(true)
    expect(wandering(535, 560)).toBe(true)
  })
})

const squareOfCorrelation = (x: readonly number[], y: readonly number[]): number => {
  const mean = (values: readonly number[]) => values.reduce((sum, v) => sum + v, 0) / values.length
  const [mx, my] = [mean(x), mean(y)]
  const sum = (f: (i: number) => number) => x.reduce((total, _, i) => total + f(i), 0)
  const xy = sum((i) => (x[i]! - mx) * (y[i]! - my))
  return xy ** 2 / (sum((i) => (x[i]! - mx) ** 2) * sum((i) => (y[i]! - my) ** 2))
}
