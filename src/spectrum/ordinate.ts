/**
 * From what a file holds to absorbance A = −log10 T, or for diffuse reflectance of solids to the Kubelka–Munk function
 * F(R) = (1 − R)² / 2R, continued oddly above R = 1 (blank darker than the sample) so that it stays monotone and smooth.
 */
import type { OrdinateKind } from '../readers/types.ts'

export interface Ordinate {
  readonly kind: 'absorbance' | 'kubelka-munk'
  /** NaN where no light came through (transmittance not above zero) or nothing was measured. */
  readonly value: (raw: number) => number
  /** |d value / d raw|: carries a reading step of the file over to the result. */
  readonly slope: (raw: number) => number
  /** An overflow word, or no light at all: beyond any limit. */
  readonly beyond: (raw: number) => boolean
}

const kubelkaMunk = (r: number): number => (r > 0 ? (Math.sign(1 - r) * (1 - r) ** 2) / (2 * r) : Number.NaN)
const fromTransmittance = (t: number): number => (t > 0 && t < Infinity ? -Math.log10(t) : Number.NaN)
const asIs = (v: number): number => (Number.isFinite(v) ? v : Number.NaN)

const ratio = (kind: Ordinate['kind'], scale: number): Ordinate => ({
  kind,
  value: (raw) => (kind === 'absorbance' ? fromTransmittance(raw / scale) : kubelkaMunk(raw / scale)),
  slope: (raw) => {
    const r = raw / scale
    return (kind === 'absorbance' ? Math.LOG10E / r : Math.abs(1 - r * r) / (2 * r * r)) / scale
  },
  beyond: (raw) => raw <= 0 || raw === Infinity,
})

/** How an ordinate of this kind becomes what is fitted. */
export const ordinateOf = (kind: OrdinateKind): Ordinate => {
  if (kind === 'transmittance') return ratio('absorbance', 1)
  if (kind === 'percent-transmittance') return ratio('absorbance', 100)
  if (kind === 'reflectance') return ratio('kubelka-munk', 1)
  if (kind === 'percent-reflectance') return ratio('kubelka-munk', 100)
  return { kind, value: asIs, slope: () => 1, beyond: (raw) => raw === Infinity }
}

/** The limit in the units of the ordinate: absorbance itself, or F(R) at R = 10^−limit. */
export const limitOf = (kind: Ordinate['kind'], absorbanceLimit: number): number =>
  kind === 'absorbance' ? absorbanceLimit : kubelkaMunk(10 ** -absorbanceLimit)
