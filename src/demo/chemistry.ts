/**
 * Invented spectra for the demonstration. A compound is two Gaussians in wavenumber; what an instrument writes is
 * ε·c·l on a sloping background, with noise and with the small wavelength error that every run has. Band positions and
 * ε are from memory, widths are usual ones: good for a demonstration, not for anything else.
 */
import { normal, seeded } from './random.ts'

interface Band {
  readonly nm: number
  /** Molar absorption coefficient at the maximum, L/(mol·cm). */
  readonly epsilon: number
  readonly widthPerCm: number
}

export type Compound = readonly Band[]

/** [CrCl(NH3)5]2+ */
export const CHLOROPENTAAMMINE: Compound = [
  { nm: 512, epsilon: 36, widthPerCm: 3500 },
  { nm: 375, epsilon: 39, widthPerCm: 4100 },
]
/** [Cr(NH3)5(H2O)]3+ */
export const AQUAPENTAAMMINE: Compound = [
  { nm: 480, epsilon: 35, widthPerCm: 3500 },
  { nm: 360, epsilon: 30, widthPerCm: 4100 },
]
/** [Cr(H2O)6]3+ */
export const HEXAAQUA: Compound = [
  { nm: 575, epsilon: 13, widthPerCm: 3400 },
  { nm: 407, epsilon: 15, widthPerCm: 4000 },
]
/** [Cr(en)3]3+ */
export const TRIS_EN: Compound = [
  { nm: 458, epsilon: 75, widthPerCm: 3300 },
  { nm: 351, epsilon: 61, widthPerCm: 3700 },
]

/** Rate constant of the replacement of chloride by water, 1/s (25 °C, from memory). */
const AQUATION_PER_S = 8e-6

/** Part of the chloride that water has replaced after that time, first order. */
export const partReplaced = (ageMs: number): number => 1 - Math.exp(-AQUATION_PER_S * (ageMs / 1000))

export interface Measurement {
  readonly sample: string
  /** Epoch ms. */
  readonly at: number
  /** What is in the cell: mol/L of each. */
  readonly contents: readonly (readonly [compound: Compound, molPerL: number])[]
}

export interface Curve extends Measurement {
  /** Ascending, 1 nm apart. */
  readonly nm: readonly number[]
  /** Absorbance at 10 mm. */
  readonly absorbance: readonly number[]
}

const FIRST_NM = 320
const LAST_NM = 700
const PATH_CM = 1
const NOISE = 4e-4
/** Repeatability of the wavelength, nm. */
const JITTER_NM = 0.02

const epsilonAt = (compound: Compound, nm: number): number =>
  compound.reduce((sum, band) => {
    const off = (1e7 / nm - 1e7 / band.nm) / band.widthPerCm
    return sum + band.epsilon * Math.exp(-4 * Math.LN2 * off * off)
  }, 0)

/** What the instrument measures. The same measurement and seed give the same numbers. */
export const measure = (measurement: Measurement, seed: number): Curve => {
  const random = seeded(seed)
  const shift = JITTER_NM * normal(random)
  const offset = 0.004 + 0.001 * normal(random)
  const nm = Array.from({ length: LAST_NM - FIRST_NM + 1 }, (_, i) => FIRST_NM + i)
  const absorbance = nm.map((at) => {
    const bands = measurement.contents.reduce(
      (sum, [compound, molPerL]) => sum + epsilonAt(compound, at + shift) * molPerL * PATH_CM,
      0,
    )
    const scatter = 0.006 * (500 / at) ** 4
    return bands + scatter + offset + NOISE * normal(random)
  })
  return { ...measurement, nm, absorbance }
}
