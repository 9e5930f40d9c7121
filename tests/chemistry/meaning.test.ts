import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { type BandState, interpretChange } from '../../src/chemistry/meaning.ts'
import { CHLORO } from './species.ts'

const at = (nm: number, height = 0.5, uPositionPerCm = 4): BandState => ({
  positionPerCm: 1e7 / nm,
  uPositionPerCm,
  height,
  uHeight: 0.001,
})
const BEFORE = { nu1: at(512), nu2: at(375, 0.55) }
const moved = (d1: number, d2: number, factor1 = 1, factor2 = factor1) => ({
  nu1: { ...BEFORE.nu1, positionPerCm: BEFORE.nu1.positionPerCm + d1, height: BEFORE.nu1.height! * factor1 },
  nu2: { ...BEFORE.nu2, positionPerCm: BEFORE.nu2.positionPerCm + d2, height: BEFORE.nu2.height! * factor2 },
})
const told = (now: ReturnType<typeof moved>) => interpretChange({ species: CHLORO, before: BEFORE, now })

// from 512 and 375 nm to 480 and 360 nm: 1302 and 1111 cm⁻¹
const WAY = [1e7 / 480 - 1e7 / 512, 1e7 / 360 - 1e7 / 375] as const

describe('a change of the bands', () => {
  test('towards a known product by one share of the way is that product’s cause, with the share', () => {
    const { diagnosis, meaning, confidence } = told(moved(0.08 * WAY[0], 0.08 * WAY[1]))
    expect(diagnosis).toBe('substitution')
    expect(meaning).toMatch(/5 NH3, 1 H2O.*about 8 ± \d %/)
    expect(confidence).toBeNull()
  })

  test('away from the product, or of one band only, is not', () => {
    expect(told(moved(-0.08 * WAY[0], -0.08 * WAY[1])).diagnosis).not.toBe('substitution')
    expect(told(moved(0.08 * WAY[0], 0)).diagnosis).toBe('unclear')
    const one = interpretChange({ species: CHLORO, before: { nu1: BEFORE.nu1 }, now: { nu1: at(505) } })
    expect(one).toMatchObject({ diagnosis: 'unclear', meaning: expect.stringContaining('One band alone') })
  })

  test('by the same number of nm is the wavelength axis of the instrument', () => {
    fc.assert(
      fc.property(
        fc.oneof(fc.double({ min: -3, max: -0.5, noNaN: true }), fc.double({ min: 1, max: 3, noNaN: true })),
        (nm) => {
          const reading = interpretChange({
            species: null,
            before: BEFORE,
            now: { nu1: at(512 + nm), nu2: at(375 + nm) },
          })
          expect(reading.diagnosis).toBe('wavelength')
          expect(reading.check[0]).toContain('wavelength check')
        },
      ),
    )
  })

  test('of all heights by one factor, at unmoved bands, is the concentration or the path', () => {
    expect(told(moved(0, 0, 0.9))).toMatchObject({
      diagnosis: 'concentration',
      meaning: expect.stringContaining('0.900 ±'),
    })
    expect(told(moved(0, 0, 0.9, 0.8)).diagnosis).toBe('unclear')
  })

  test('within the uncertainties is no change that means anything', () => {
    expect(told(moved(5, -4)).diagnosis).toBe('unclear')
  })

  test('that two readings fit is unclear, and both are named', () => {
    // wide uncertainties: one shift in nm and a share of the way look alike
    const wide = { nu1: at(512, 0.5, 60), nu2: at(375, 0.55, 100) }
    const now = { nu1: at(500, 0.5, 60), nu2: at(367, 0.55, 100) }
    const reading = interpretChange({ species: CHLORO, before: wide, now })
    expect(reading.diagnosis).toBe('unclear')
    expect(reading.meaning).toMatch(/Several readings fit.*Or:/)
  })
})
