/**
 * From the axis of a file to vacuum wavenumbers and back.
 *
 * Refractive index of standard air (15 °C, 101 325 Pa, dry, 450 ppm CO2), P. E. Ciddor, Appl. Opt. 35 (1996) 1566, eq. 1,
 * with s = σ², σ = 1/λ the vacuum wavenumber in µm⁻¹:
 *
 *     n − 1 = 0.05792105 / (238.0185 − s) + 0.00167917 / (57.362 − s)
 *
 * so that λ_vacuum = n(λ_vacuum) · λ_air. The photon energy is E = h c ν̃ (CODATA, exact since 2019).
 */
import type { AxisUnit, Medium } from '../readers/types.ts'

/** 1 eV in cm⁻¹: e/(h c), e = 1.602176634e-19 C, h = 6.62607015e-34 J s, c = 299 792 458 m/s, all exact in the SI of 2019. */
export const PER_CM_OF_EV = 1.602176634e-19 / (6.62607015e-34 * 299_792_458) / 100

const indexOfAir = (vacuumNm: number): number => {
  const s = (1000 / vacuumNm) ** 2
  return 1 + 0.05792105 / (238.0185 - s) + 0.00167917 / (57.362 - s)
}

/** Wavelength in standard air, nm, of a vacuum wavelength in nm. Valid from 185 nm upwards (the formula's own range begins near 230 nm). */
export const vacuumToAirNm = (vacuumNm: number): number => vacuumNm / indexOfAir(vacuumNm)

/** Vacuum wavelength, nm, of a wavelength in standard air in nm; iterated until it moves by less than 1e-10 nm. */
export const airToVacuumNm = (airNm: number): number => {
  let vacuumNm = airNm * 1.00028
  for (let turn = 0; turn < 20; turn++) {
    const next = airNm * indexOfAir(vacuumNm)
    const moved = Math.abs(next - vacuumNm)
    vacuumNm = next
    if (moved < 1e-10) break // dn/dλ is about 1e-8 per nm: each turn gains six digits or more
  }
  return vacuumNm
}

/** Vacuum wavenumber, cm⁻¹, of a wavelength in nm written in this medium. */
export const wavenumberOfNm = (nm: number, medium: Medium): number => 1e7 / (medium === 'air' ? airToVacuumNm(nm) : nm)

/** Wavelength in nm, in this medium, of a vacuum wavenumber in cm⁻¹. */
export const nmOfWavenumber = (perCm: number, medium: Medium): number =>
  medium === 'air' ? vacuumToAirNm(1e7 / perCm) : 1e7 / perCm

/**
 * Vacuum wavenumber, cm⁻¹, of one value of a file's axis. A wavenumber or an energy is a vacuum quantity unless the
 * file itself says that its wavenumbers are reciprocals of wavelengths in air (`medium` air).
 */
export const vacuumPerCm = (value: number, unit: AxisUnit, medium: Medium): number => {
  if (unit === 'nm') return wavenumberOfNm(value, medium)
  if (unit === 'um') return wavenumberOfNm(value * 1000, medium)
  if (unit === 'eV') return value * PER_CM_OF_EV
  return medium === 'air' ? wavenumberOfNm(1e7 / value, 'air') : value
}

/** Nominal wavelength in nm, medium disregarded: to compare axes of any unit with what an instrument can measure. */
export const nominalNm = (value: number, unit: AxisUnit): number => {
  if (unit === 'nm') return value
  if (unit === 'um') return value * 1000
  return 1e7 / (unit === 'eV' ? value * PER_CM_OF_EV : value)
}
