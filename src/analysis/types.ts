import type { BandFit, Recipe } from '../bands/types.ts'
import type { ParameterFit } from '../ligandField/types.ts'
import type { Flag, Spectrum } from '../spectrum/types.ts'

/** Engine version: changes whenever the same bytes could give other numbers. Stored with every analysis. */
export const ENGINE = 'tendq 0.1.0'

export interface AnalysedBand {
  readonly role: string | null
  readonly term: string | null
  readonly positionPerCm: number
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
  readonly spectrum: Spectrum
  readonly fit: BandFit
  readonly recipe: Recipe | null
  readonly bands: readonly AnalysedBand[]
  readonly ligandField: ParameterFit | null
  readonly flags: readonly Flag[]
  readonly remarks: readonly string[]
}
