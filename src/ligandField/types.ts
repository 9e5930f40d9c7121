import type { Flag } from '../spectrum/types.ts'

export type Geometry = 'octahedral' | 'tetrahedral'
export type Spin = 'high' | 'low'

/** What the field needs to know of an ion; the table with sources is `chemistry/ions.ts`. Energies in cm⁻¹. */
export interface Ion {
  /** `Cr3+` */
  readonly symbol: string
  /** Number of d electrons, 1 to 9. */
  readonly d: number
  readonly freeIonBPerCm: number | null
  readonly freeIonBSource: string
  /** Typical C/B and its standard uncertainty, a prior where no spin-forbidden band is seen. */
  readonly cOverB: number
  readonly uCOverB: number
  /** The spin state that octahedral complexes of the ion mostly have; null or absent where only one exists. */
  readonly usualSpin?: Spin | null
  /** Δ of an octahedral complex with ligands from the middle of the series; null or absent where not known. */
  readonly typicalDeltaPerCm?: number | null
}

/** One labelled level. */
export interface Level {
  /** `4A2g`, `4T1g(F)` is written `4T1g` with index 1. */
  readonly label: string
  /** Counts the roots of one (multiplicity, irrep) upwards from 1. */
  readonly index: number
  readonly multiplicity: number
  readonly irrep: string
  /** Spin times space. */
  readonly degeneracy: number
  /** From the ground level. */
  readonly energyPerCm: number
}

/** A band as the fit found it, before anyone says which transition it is. Ascending in position. */
export interface ObservedBand {
  readonly positionPerCm: number
  readonly uPositionPerCm: number
  readonly widthPerCm: number
  readonly height: number
  /** Role that the species' expectation gives it, if one does. */
  readonly hint: string | null
}

/** `nu1`, `nu1a`, `nu2`, `sf1` …; null: no d–d transition of this ion. */
export interface AssignedBand {
  readonly role: string | null
  /** `4T2g`; null where role is null. */
  readonly term: string | null
}

export interface Assignment {
  /** One entry per observed band, same order. */
  readonly bands: readonly AssignedBand[]
  readonly probability: number
  readonly runnerUp: { readonly bands: readonly AssignedBand[]; readonly probability: number } | null
  readonly flags: readonly Flag[]
}

export interface ParameterFit {
  readonly ion: string
  readonly d: number
  readonly geometry: Geometry
  readonly spin: Spin | null
  /** Roles that determined the result. */
  readonly bandsUsed: readonly string[]
  readonly deltaPerCm: number | null
  readonly uDeltaPerCm: number | null
  readonly bPerCm: number | null
  readonly uBPerCm: number | null
  readonly cPerCm: number | null
  readonly uCPerCm: number | null
  readonly beta: number | null
  readonly betaFreeIonBPerCm: number | null
  readonly dqOverB: number | null
  readonly correlationDeltaB: number | null
  readonly chi2: number | null
  readonly degreesOfFreedom: number
  /** Profile interval of B (k = 1) where the covariance is too crude; an end that χ² never reaches is null. */
  readonly intervalBPerCm?: readonly [low: number | null, high: number | null]
  /** Other parameters that fit the same bands, less plausible ones last. */
  readonly alternatives?: readonly { readonly deltaPerCm: number; readonly bPerCm: number; readonly cPerCm: number }[]
  readonly flags: readonly Flag[]
  /** One sentence a flag: what is wrong and what would mend it. */
  readonly remarks: readonly string[]
}
