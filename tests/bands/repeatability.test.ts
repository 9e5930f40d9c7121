import { describe, expect, it } from 'vitest'
import { chooseRecipe, fitBands } from '../../src/bands/index.ts'
import type { RawSpectrum } from '../../src/readers/types.ts'
import { prepareSpectrum } from '../../src/spectrum/index.ts'
import type { Spectrum } from '../../src/spectrum/types.ts'

/** Seeded noise: a linear congruential generator and the sum of twelve uniforms. */
const normals = (seed: number): (() => number) => {
  let state = seed >>> 0
  const uniform = () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0
    return state / 2 ** 32
  }
  return () => Array.from({ length: 12 }, uniform).reduce((sum, u) => sum + u, -6)
}

/** Two bands that are no Gaussians: a steeper red side, and a ripple such as vibrations leave. */
const structured = (perCm: number): number => {
  const skewed = (centre: number, width: number, height: number) => {
    const w = perCm < centre ? 0.85 * width : 1.15 * width
    return height * Math.exp(-4 * Math.LN2 * ((perCm - centre) / w) ** 2)
  }
  const bands = skewed(17400, 3300, 0.4) + skewed(24600, 3800, 0.45)
  return 0.02 + bands * (1 + 0.02 * Math.sin(perCm / 150))
}

const copies = (count: number, noise: number): readonly Spectrum[] =>
  Array.from({ length: count }, (_, seed) => {
    const normal = normals(seed + 1)
    const x = Float64Array.from({ length: 401 }, (_, i) => 340 + i)
    const raw: RawSpectrum = {
      index: 0,
      x,
      y: x.map((nm) => structured(1e7 / (nm * 1.000277)) + noise * normal()),
      xUnit: 'nm',
      medium: 'air',
      yKind: 'absorbance',
      ...{ sample: null, title: null, time: null, pathMm: null, temperatureC: null, concentrationMolPerL: null },
      header: {},
      warnings: [],
    }
    const prepared = prepareSpectrum(raw, { medium: 'air', absorbanceLimit: 3, bandwidthNm: 1 })
    if (prepared.kind === 'refused') throw new Error(prepared.faults[0].what)
    return prepared.spectrum
  })

const sd = (values: readonly number[]): number => {
  const mean = values.reduce((sum, v) => sum + v, 0) / values.length
  return Math.sqrt(values.reduce((sum, v) => sum + (v - mean) ** 2, 0) / (values.length - 1))
}

describe('repeatability under a locked recipe', () => {
  it('is the scatter of repeated measurements, also where the bands are no Gaussians: the structure comes again, the noise does not', () => {
    const spectra = copies(240, 0.0008)
    const choice = chooseRecipe(spectra.slice(0, 5), { bands: 2 })
    if (choice.kind === 'none') throw new Error(choice.why)
    expect(choice.recipe.misfit).toBeGreaterThan(0)
    const fits = spectra.map((spectrum) => fitBands(spectrum, choice.recipe, [choice.recipe]))
    const components = fits.map((fit) => (fit.kind === 'fitted' ? fit.components : []))
    for (const k of [0, 1]) {
      const positions = components.map((some) => some[k]!.positionPerCm)
      const us = components.map((some) => some[k]!.uPositionPerCm!)
      const ratio = sd(positions) / (us.reduce((sum, u) => sum + u, 0) / us.length)
      expect(ratio).toBeGreaterThan(0.85)
      expect(ratio).toBeLessThan(1.15)
      // 95 % intervals of differences between neighbours
      const covered = positions.filter(
        (p, i) => i > 0 && Math.abs(p - positions[i - 1]!) < 1.96 * Math.hypot(us[i]!, us[i - 1]!),
      ).length
      expect(covered / (positions.length - 1)).toBeGreaterThan(0.9)
      expect(covered / (positions.length - 1)).toBeLessThan(0.99)
    }
  })
})
