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

  it('the aquation of a trans cobalt(III) complex: the two parts of its split band, of which the red one fades', () => {
    const fits = analyse(readAquation())
    // Read off the first spectrum: maximum at 614 nm, a shoulder at 455 nm.
    const [first, ...others] = bandsOf(fits[0]!)
    within(first!.positionPerCm, 1e7 / 614, 250)
    within(first!.maximumPerCm, 1e7 / 614, 53)
    expect(others.length).toBeGreaterThanOrEqual(2)
    expect(Math.min(...others.map(({ positionPerCm }) => Math.abs(positionPerCm - 1e7 / 455)))).toBeLessThan(900)
    const red = fits.map((fit) => bandsOf(fit)[0]!.height)
    expect(red).toEqual(red.toSorted((a, b) => b - a))
  })
})
