import { describe, expect, it } from 'vitest'
import { chooseRecipe, fitBands } from '../../src/bands/index.ts'
import { runsOf } from '../../src/bands/quality.ts'
import { bandAt } from '../../src/bands/shapes.ts'
import { shaped } from './shapes.ts'
import { gaussianNoise, generator, simulate } from './simulated.ts'

const random = generator(77)
const normal = gaussianNoise(random)

describe('the test of runs (Wald & Wolfowitz; formulas of the NIST/SEMATECH e-Handbook 1.3.5.13)', () => {
  it('three signs of one kind and two of the other in three runs: mean 3.4, variance 0.84, z = −0.436 (by hand)', () => {
    expect(runsOf(Float64Array.of(1, 2, -1, -3, 1))).toBeCloseTo(-0.4 / Math.sqrt(0.84), 12)
  })

  it('is a standard normal deviate for noise', () => {
    const values = Array.from({ length: 2000 }, () => runsOf(Float64Array.from({ length: 200 }, normal)))
    const mean = values.reduce((sum, z) => sum + z, 0) / values.length
    const variance = values.reduce((sum, z) => sum + (z - mean) ** 2, 0) / values.length
    expect(Math.abs(mean)).toBeLessThan(4 / Math.sqrt(2000))
    expect(Math.abs(variance - 1)).toBeLessThan(0.15)
  })

  it('is far below zero for a slow wave', () => {
    expect(runsOf(Float64Array.from({ length: 300 }, (_, i) => Math.sin(i / 20)))).toBeLessThan(-10)
  })
})

const fitOf = (spectrum: ReturnType<typeof simulate>) => {
  const choice = chooseRecipe([spectrum], {})
  if (choice.kind === 'none') throw new Error(choice.why)
  const fit = fitBands(spectrum, choice.recipe, choice.admissible)
  if (fit.kind === 'unfitted') throw new Error(fit.why)
  return fit
}

describe('the verdict on a fit', () => {
  const two = (x: number) =>
    0.5 * bandAt({ kind: 'gaussian' }, 17400, 3600, x) + 0.4 * bandAt({ kind: 'gaussian' }, 24600, 3900, x)

  it('says that noise is reached where it is', () => {
    const { quality } = fitOf(simulate(two, 1e-3, normal))
    expect(quality.verdict).toMatch(/^the fit describes the spectrum to its noise/)
    expect(Math.abs(quality.runsZ)).toBeLessThan(4)
    expect(quality.signalToNoise / 500).toBeCloseTo(1, 1)
    expect(quality.lackOfFit).toBe(0)
    expect(quality.boundsHit).toEqual([])
    expect(quality.condition).toBeGreaterThan(1)
  })

  it('says that structure is missed where bands have other shapes, and that absolute positions depend on the recipe', () => {
    const { quality } = fitOf(shaped('all', 2, random, normal).spectrum)
    expect(quality.verdict).toMatch(/^the curve has structure that the bands miss by/)
    expect(quality.runsZ).toBeLessThan(-4)
    expect(quality.lackOfFit).toBeGreaterThan(0)
    expect(quality.effectivePoints).toBeLessThan(200)
  })
})
