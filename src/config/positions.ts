import { wavenumberOfNm } from '../spectrum/index.ts'

/** A place on the axis, or a distance along it, as a person writes it. */
export interface Written {
  readonly value: number
  readonly unit: 'nm' | 'cm^-1'
}

/** Vacuum wavenumber, cm⁻¹; a wavelength is read as measured in air. */
export const positionPerCm = ({ value, unit }: Written): number =>
  unit === 'cm^-1' ? value : wavenumberOfNm(value, 'air')

/** nm → cm⁻¹ is so nearly reciprocal that the air wavelength of a wavenumber, where only a distance needs it, is 10⁷/ν̃. */
const aboutNm = ({ value, unit }: Written): number => (unit === 'nm' ? value : 1e7 / value)

/**
 * Half the width, cm⁻¹, of the range `centre ± distance`. Null where the range reaches to zero or below, which has no
 * meaning on either axis.
 */
export const halfWidthPerCm = (centre: Written, distance: Written): number | null => {
  if (distance.unit === 'cm^-1') return distance.value < positionPerCm(centre) ? distance.value : null
  const nm = aboutNm(centre)
  if (distance.value >= nm) return null
  return (wavenumberOfNm(nm - distance.value, 'air') - wavenumberOfNm(nm + distance.value, 'air')) / 2
}
