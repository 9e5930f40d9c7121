import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { airToVacuumNm, nmOfWavenumber, PER_CM_OF_EV, vacuumToAirNm, wavenumberOfNm } from '../../src/spectrum/index.ts'

describe('air and vacuum (Ciddor, Appl. Opt. 35 (1996) 1566, standard air)', () => {
  // check values recomputed from the published formula, as restated for standard air
  it.each([
    [633, 632.825005],
    [550, 549.847232],
    [400, 399.886927],
  ])('%f nm in vacuum is %f nm in air', (vacuum, air) => {
    expect(vacuumToAirNm(vacuum)).toBeCloseTo(air, 6)
    expect(airToVacuumNm(air)).toBeCloseTo(vacuum, 6)
  })

  it('ignoring air would shift a band at 575 nm by 4.8 and one at 351 nm by 8.1 per centimetre', () => {
    expect(1e7 / 575 - wavenumberOfNm(575, 'air')).toBeCloseTo(4.8, 1)
    expect(1e7 / 351 - wavenumberOfNm(351, 'air')).toBeCloseTo(8.1, 1)
  })

  it('comes back to the same wavelength within 1e-9 nm', () => {
    fc.assert(
      fc.property(fc.double({ min: 200, max: 3000, noNaN: true }), fc.constantFrom('air', 'vacuum'), (nm, medium) => {
        expect(Math.abs(nmOfWavenumber(wavenumberOfNm(nm, medium), medium) - nm)).toBeLessThan(1e-9)
      }),
    )
  })

  it('one electronvolt is 8065.543937 per centimetre (CODATA 2018, exact)', () => {
    expect(PER_CM_OF_EV).toBeCloseTo(8065.543937, 6)
  })
})
