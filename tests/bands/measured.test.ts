/**
 * Measured spectra (published open data, folder TENDQ_REFERENCE_DATA): a vanadium(III)/vanadium(II) series in sulfuric acid and
 * the aquation of a trans-dichlorobis(ethylenediamine)cobalt(III). Expected values: an independent analysis of the same files.
 */
import { describe, expect, it } from 'vitest'
import { chooseRecipe, fitBands } from '../../src/bands/index.ts'
import type { BandFit, FittedComponent } from '../../src/bands/types.ts'
import type { Spectrum } from '../../src/spectrum/types.ts'
import { hasReferenceData, readAquation, readVanadium } from './measured.ts'

const analyse = (spectra: readonly Spectrum[]): readonly Extract<BandFit, { kind: 'fitted' }>[] => {
  const choice = chooseRecipe(spectra, {})
  if (choice.kind === 'none') throw new Error(choice.why)
  return spectra.map((spectrum) => {
    const fit = fitBands(spectrum, choice.recipe, choice.admissible)
    if (fit.kind === 'unfitted') throw new Error(fit.why)
    return fit
  })
}

const bandsOf = (fit: Extract<BandFit, { kind: 'fitted' }>): readonly FittedComponent[] =>
  fit.components.filter(({ kind }) => kind === 'band')

const within = (found: number | null, expected: number, tolerance: number) =>
  expect(Math.abs((found ?? Number.NaN) - expected)).toBeLessThanOrEqual(tolerance)

describe.skipIf(!hasReferenceData)('measured spectra (TENDQ_REFERENCE_DATA names their folder)', () => {
  it('vanadium(II): both bands where an independent analysis finds them, and the spread over recipes known', () => {
    const [fit] = analyse([readVanadium('100')])
    const [nu1, nu2] = bandsOf(fit!)
    within(nu1!.maximumPerCm, 11728, 15)
    within(nu2!.maximumPerCm, 17787, 15)
    within(nu1!.positionPerCm, 11780, 80)
    within(nu2!.positionPerCm, 17780, 80)
    expect(nu1!.positionPerCm - 2 * nu1!.uModelPerCm!).toBeLessThan(11370)
    expect(nu1!.positionPerCm + 2 * nu1!.uModelPerCm!).toBeGreaterThan(11850)
  })

  it('vanadium(III): both bands where an independent analysis finds them', () => {
    const [fit] = analyse([readVanadium('000')])
    const [nu1, nu2] = bandsOf(fit!)
    within(nu1!.maximumPerCm, 16393, 20)
    within(nu2!.maximumPerCm, 24351, 60)
    within(nu1!.positionPerCm, 16430, 120)
    within(nu2!.positionPerCm, 24300, 450)
  })

  it('the aquation of a trans cobalt(III) complex: three bands, the first near 614 nm, the curve’s maximum within 2 nm', () => {
    const fits = analyse(readAquation())
    for (const fit of fits) expect(bandsOf(fit)).toHaveLength(3)
    const [nu1a, nu1b] = bandsOf(fits[0]!)
    within(nu1a!.positionPerCm, 16282, 250)
    within(nu1a!.maximumPerCm, 16282, 53)
    within(nu1b!.positionPerCm, 21970, 900)
  })
})
