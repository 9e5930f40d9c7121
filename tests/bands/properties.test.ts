import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { fitBands } from '../../src/bands/index.ts'
import type { BandFit, Recipe } from '../../src/bands/types.ts'
import type { Spectrum } from '../../src/spectrum/types.ts'
import { gaussianNoise, generator, simulate } from './simulated.ts'

const recipe: Recipe = {
  name: '2 gaussian + constant',
  components: [17000, 25000].map((positionPerCm) => ({
    shape: { kind: 'gaussian' },
    kind: 'band',
    positionPerCm,
    positionBoundsPerCm: [positionPerCm - 2500, positionPerCm + 2500],
    widthPerCm: 3500,
    widthBoundsPerCm: [1200, 7000],
  })),
  background: [{ kind: 'constant' }],
  windowPerCm: [11000, 33400],
}

const spectrumOf = (seed: number): Spectrum => {
  const random = generator(seed)
  const between = (a: number, b: number) => a + (b - a) * random()
  const bands = [17000, 25000].map((p) => [p + between(-900, 900), between(3000, 4300), between(0.2, 0.9)] as const)
  return simulate({ bands, constant: 0.01, scatter: 0 }, 0.001, gaussianNoise(random), [310, 880, 2])
}

const fitted = (spectrum: Spectrum, under: Recipe = recipe): Extract<BandFit, { kind: 'fitted' }> => {
  const fit = fitBands(spectrum, under, [])
  if (fit.kind === 'unfitted') throw new Error(fit.why)
  return fit
}

const seeds = fc.integer({ min: 1, max: 1_000_000 })
const property = <T>(other: fc.Arbitrary<T>, check: (seed: number, value: T) => void) =>
  fc.assert(fc.property(seeds, other, check), { numRuns: 25, seed: 7 })

describe('for any spectrum of two bands', () => {
  it('absorbance scaled scales heights, and moves nothing', () =>
    property(fc.double({ min: 0.05, max: 20, noNaN: true }), (seed, factor) => {
      const spectrum = spectrumOf(seed)
      const scaled = {
        ...spectrum,
        absorbance: spectrum.absorbance.map((a) => factor * a),
        noise: spectrum.noise.map((s) => factor * s),
      }
      const [one, other] = [fitted(spectrum), fitted(scaled)]
      one.components.forEach((component, k) => {
        expect(other.components[k]!.positionPerCm).toBeCloseTo(component.positionPerCm, 3)
        expect(other.components[k]!.height / factor).toBeCloseTo(component.height, 6)
      })
    }))

  it('an axis shifted shifts positions, and changes no width', () =>
    property(fc.double({ min: -400, max: 400, noNaN: true }), (seed, shift) => {
      const spectrum = spectrumOf(seed)
      const shifted = { ...spectrum, wavenumberPerCm: spectrum.wavenumberPerCm.map((x) => x + shift) }
      const [one, other] = [fitted(spectrum), fitted(shifted, { ...recipe, windowPerCm: [10000, 35000] })]
      one.components.forEach((component, k) => {
        expect(other.components[k]!.positionPerCm - shift).toBeCloseTo(component.positionPerCm, 2)
        expect(other.components[k]!.widthPerCm).toBeCloseTo(component.widthPerCm, 2)
      })
    }))

  it('points that are masked may hold anything', () =>
    property(fc.double({ min: -5, max: 5, noNaN: true }), (seed, nonsense) => {
      const spectrum = spectrumOf(seed)
      const used = spectrum.used.map((_, i) => (i % 17 === 3 ? 0 : 1))
      const one = fitted({ ...spectrum, used })
      const other = fitted({
        ...spectrum,
        used,
        absorbance: spectrum.absorbance.map((a, i) => (used[i] === 1 ? a : nonsense)),
      })
      expect(other.components).toEqual(one.components)
    }))

  it('every other point tells the same, within what the noise allows', () =>
    property(fc.constantFrom(0, 1), (seed, which) => {
      const spectrum = spectrumOf(seed)
      const used = spectrum.used.map((_, i) => (i % 2 === which ? 1 : 0))
      const [one, half] = [fitted(spectrum), fitted({ ...spectrum, used })]
      one.components.forEach(({ positionPerCm, uPositionPerCm }, k) => {
        const thinned = half.components[k]!
        expect(Math.abs(thinned.positionPerCm - positionPerCm)).toBeLessThan(
          5 * Math.hypot(thinned.uPositionPerCm!, uPositionPerCm!),
        )
      })
    }))

  it('points out of order are refused with a reason, never sorted in silence', () => {
    const spectrum = spectrumOf(3)
    const fit = fitBands({ ...spectrum, wavenumberPerCm: spectrum.wavenumberPerCm.toReversed() }, recipe, [])
    expect(fit.kind === 'unfitted' && fit.why).toMatch(/do not ascend/)
  })
})
