/**
 * Measured spectra (published open data, folder TENDQ_REFERENCE_DATA): a vanadium(III)/vanadium(II) series in sulfuric acid and
 * the aquation of a trans-dichlorobis(ethylenediamine)cobalt(III). Expected values: an independent analysis of the same files.
 */
import { describe, expect, it } from 'vitest'
import { chooseRecipe, evaluateFit, fitBands } from '../../src/bands/index.ts'
import { analysed, bandsOf, CHARGES, hasReferenceData, prepared, readAquation, readVanadium } from './measured.ts'

const within = (found: number | null | undefined, expected: number, tolerance: number) =>
  expect(Math.abs((found ?? Number.NaN) - expected)).toBeLessThanOrEqual(tolerance)

const aquation = hasReferenceData ? readAquation() : []

describe.skipIf(!hasReferenceData)('measured spectra (TENDQ_REFERENCE_DATA names their folder)', () => {
  it('vanadium(II): both bands where an independent analysis finds them, and the spread over recipes known', () => {
    const { fit, ligandField } = analysed(readVanadium('100'), 'V2+')
    const [nu1, nu2, nu3] = bandsOf(fit)
    within(nu1!.maximumPerCm, 11728, 15)
    within(nu2!.maximumPerCm, 17787, 15)
    within(nu1!.positionPerCm, 11780, 80)
    within(nu2!.positionPerCm, 17780, 80)
    // at the edge of sight
    within(nu3!.positionPerCm, 27460, 800)
    within(ligandField!.bPerCm, 675, 30)
    expect(nu1!.positionPerCm - 2 * nu1!.uModelPerCm!).toBeLessThan(11370)
    expect(nu1!.positionPerCm + 2 * nu1!.uModelPerCm!).toBeGreaterThan(11850)
  })

  it('vanadium(III): both bands where an independent analysis finds them', () => {
    const [nu1, nu2] = bandsOf(analysed(readVanadium('000'), 'V3+').fit)
    within(nu1!.maximumPerCm, 16393, 20)
    within(nu2!.maximumPerCm, 24351, 60)
    within(nu1!.positionPerCm, 16430, 120)
    within(nu2!.positionPerCm, 24300, 450)
  })

  it('every mixture of the two gives two bands at least, each of a d–d band’s width, whichever ion is told', () => {
    for (const percent of CHARGES)
      for (const ion of ['V2+', 'V3+']) {
        const bands = bandsOf(analysed(readVanadium(percent), ion).fit)
        expect(bands.length, percent).toBeGreaterThanOrEqual(2)
        for (const { widthPerCm, height } of bands) {
          expect(widthPerCm).toBeGreaterThan(1500)
          expect(widthPerCm).toBeLessThan(7000)
          expect(height).toBeGreaterThan(0.02)
        }
      }
  })

  aquation.forEach((raw, i) => {
    it(`trans cobalt(III), spectrum ${i + 1} of 5 alone: the split first band, the second band, and a flank no higher than the data`, () => {
      const { fit, bands, flags, spectrum } = analysed(raw, 'Co3+')
      const [red, blue, second, ...more] = bandsOf(fit)
      expect(more).toEqual([])
      within(red!.positionPerCm, 16150, 100)
      // maxima wander from 613 to 597 nm as the chloride leaves
      within(red!.maximumPerCm, 1e7 / 605, 260)
      within(blue!.positionPerCm, 20600, 1000)
      within(second!.positionPerCm, 26000, 800)
      expect(flags).toContain('split')
      expect(bands.slice(0, 3).map(({ role }) => role)).toEqual(['nu1a', 'nu1b', 'nu2'])
      if (fit.kind !== 'fitted') return
      const x = spectrum!.wavenumberPerCm
      const { components } = evaluateFit(fit, x)
      for (const part of components) expect(Math.max(...part)).toBeLessThan(Math.max(...spectrum!.absorbance))
    })
  })

  it('one recipe for all five spectra: the red part fades as the chloride leaves', () => {
    const spectra = aquation.map(prepared)
    const choice = chooseRecipe(spectra, {})
    if (choice.kind === 'none') throw new Error(choice.why)
    const red = spectra.map((spectrum) => bandsOf(fitBands(spectrum, choice.recipe, choice.admissible))[0]!.height)
    expect(red).toEqual(red.toSorted((a, b) => b - a))
  })
})
