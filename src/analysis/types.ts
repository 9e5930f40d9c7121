import type { BandFit, Recipe } from '../bands/types.ts'
import type { ExpectedBand } from '../config/types.ts'
import type { AssignedBand, Geometry, Ion, ParameterFit, Spin } from '../ligandField/types.ts'
import type { Flag, PrepareOptions, Spectrum } from '../spectrum/types.ts'

/** Engine version: changes whenever the same bytes could give other numbers. Stored with every analysis. */
export const ENGINE = 'tendq 0.1.0'

/** What is known of a spectrum before it is analysed. */
export interface AnalysisContext {
  readonly prepare: PrepareOptions
  readonly ion: Ion
  readonly geometry: Geometry
  readonly spin: Spin | null
  /** Where the species should show its bands; empty when nothing is known. */
  readonly expected: readonly ExpectedBand[]
  /** Exactly this many d–d bands, or null: the criterion decides. */
  readonly bands: number | null
  /** Wavelength repeatability of the named instrument, nm: an error common to all bands. Null: left out. */
  readonly repeatabilityNm: number | null
}

/** A recipe with the transitions that its components were found to be; a sample keeps it for life. */
export interface LockedRecipe {
  readonly recipe: Recipe
  readonly admissible: readonly Recipe[]
  /** One entry per component of the recipe, flanks included (role null). */
  readonly roles: readonly AssignedBand[]
  /** What the assignment had to say, such as `ambiguous-assignment`. */
  readonly flags: readonly Flag[]
}

export interface AnalysedBand {
  readonly role: string | null
  readonly term: string | null
  readonly positionPerCm: number
  /** Repeatability; holds the wavelength repeatability where an instrument is named. */
  readonly uPositionPerCm: number | null
  readonly uModelPerCm: number | null
  readonly maximumPerCm: number | null
  readonly uMaximumPerCm: number | null
  /** Wavelength in the medium in which the instrument's axis is written. */
  readonly maximumNm: number | null
  readonly widthPerCm: number
  readonly uWidthPerCm: number | null
  readonly height: number
  readonly uHeight: number | null
}

/** From one spectrum to its numbers: what the worker hands back and the store keeps. */
export interface Analysis {
  readonly engine: string
  /** Null where the spectrum could not be prepared; `fit` says why. */
  readonly spectrum: Spectrum | null
  readonly fit: BandFit
  /** Null where no recipe could be chosen. */
  readonly locked: LockedRecipe | null
  readonly bands: readonly AnalysedBand[]
  readonly ligandField: ParameterFit | null
  readonly flags: readonly Flag[]
  /** Why, in sentences, in the order of the stations. */
  readonly remarks: readonly string[]
}
