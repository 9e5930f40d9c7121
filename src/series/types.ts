/** Times are epoch milliseconds; they come in as data, this room has no clock. */

/** Names of the rule language that stand for a number of one occasion. */
export type Quantity = string

/**
 * One occasion of a sample on one instrument: a spectrum, or the mean of its replicates. Values are in the units
 * of the rule language (cm⁻¹; heights at 10 mm path); null where the number could not be had.
 */
export interface Occasion {
  readonly at: number
  readonly receivedAt: number
  /** Ids of the spectra, for the record. */
  readonly spectra: readonly number[]
  readonly values: Readonly<Record<Quantity, number | null>>
  /** Standard uncertainties (repeatability), same names. */
  readonly u: Readonly<Record<Quantity, number | null>>
  /** Absorbance at a wavelength in nm as measured, by interpolation; null outside the window. */
  readonly absorbanceAt: (nm: number) => number | null
  /** Its standard uncertainty (repeatability), where it is known. */
  readonly uAbsorbanceAt?: (nm: number) => number | null
}

/** What a sample is compared with. `gathering`: not yet enough occasions. */
export type ReferenceState =
  | {
      readonly kind: 'ready'
      readonly values: Readonly<Record<Quantity, number | null>>
      /** Standard uncertainty of the reference value itself (of its mean). */
      readonly u: Readonly<Record<Quantity, number | null>>
      readonly occasions: number
      /** Time of the newest reference occasion; null for typed values. */
      readonly until: number | null
      readonly absorbanceAt: (nm: number) => number | null
      readonly uAbsorbanceAt?: (nm: number) => number | null
    }
  | { readonly kind: 'gathering'; readonly have: number; readonly need: number }
  | { readonly kind: 'refused'; readonly why: string }

/** Everything a rule may look at when it judges the newest occasion in `occasions`. */
export interface Window {
  /** Ascending in time, all of one recipe and engine; the last one is judged. */
  readonly occasions: readonly Occasion[]
  readonly reference: ReferenceState
  readonly began: number | null
  readonly temperatureC: number | null
  readonly pathMm: number | null
  readonly concentrationMolPerL: number | null
  readonly medium: 'air' | 'vacuum'
  /** What only the rules that are always there look at. */
  readonly standing?: Standing
}

/** Facts about the spectrum judged, beside its numbers. */
export interface Standing {
  /** `no-band`: the spectrum holds no band at all (blank cell); `unfitted`: the fit failed for another reason. */
  readonly fit: 'fitted' | 'no-band' | 'unfitted'
  /** Rules that stayed undecided on this occasion for another reason than gathering. */
  readonly undecided: readonly string[]
  /** Where the species has its bands. Vacuum wavenumbers, cm⁻¹. */
  readonly expected: readonly { readonly role: string; readonly nearPerCm: number; readonly withinPerCm: number }[]
}
