import type { Flag, Spectrum } from '../spectrum/types.ts'

/**
 * What is fitted: components, shapes, background, window. Chosen by an information criterion on a
 * sample's reference spectra, then locked: only spectra of one recipe are compared.
 */
export interface Recipe {
  /** `2 gaussian + 1 narrow + constant + scatter` */
  readonly name: string
  /** Ascending in position. */
  readonly components: readonly RecipeComponent[]
  readonly background: readonly BackgroundTerm[]
  /** Vacuum wavenumbers, cm⁻¹. */
  readonly windowPerCm: readonly [number, number]
  /**
   * How far the recipe is off on its reference spectra beyond their noise, as a share of the spread of the
   * absorbance (see points.ts). Weighs the fit: σ² = noise² + (misfit · spread)². Absent: 0.
   */
  readonly misfit?: number
}

/** Shapes of a band, see shapes.ts. What they hold besides position and width is part of the recipe and not fitted. */
export type BandShape =
  | { readonly kind: 'gaussian' }
  /** Log-normal; asymmetry b, positive: the blue wing is the longer. */
  | { readonly kind: 'log-normal'; readonly skew: number }
  /** Share of the Lorentzian part, 0 to 1. */
  | { readonly kind: 'pseudo-voigt'; readonly lorentz: number }
  /** Vibrational lines `quantumPerCm` apart with Poisson's weights about the mean number `huangRhys`. */
  | { readonly kind: 'progression'; readonly quantumPerCm: number; readonly huangRhys: number }

export interface RecipeComponent {
  readonly shape: BandShape
  /** A narrow feature on broad bands, see narrow.ts. */
  readonly narrow?: true
  /** `band`: a d–d band; `flank`: a charge-transfer band whose centre may lie beyond the window. */
  readonly kind: 'band' | 'flank'
  /** Where the search starts and how far it may go. cm⁻¹ */
  readonly positionPerCm: number
  readonly positionBoundsPerCm: readonly [number, number]
  /** Full width at half maximum, cm⁻¹. */
  readonly widthPerCm: number
  readonly widthBoundsPerCm: readonly [number, number]
}

/** `scatter` grows as (ν̃/ν̃₀)ⁿ; `step`, where a lamp or detector changes, is added above its place. */
export type BackgroundTerm =
  | { readonly kind: 'constant' }
  | { readonly kind: 'scatter'; readonly exponent: number }
  | { readonly kind: 'step'; readonly atPerCm: number }

/** Where bands are expected, if anything is known. */
export interface BandHint {
  readonly positionPerCm: number
  readonly withinPerCm: number
  readonly shape?: BandShape['kind']
  /** A spin-forbidden feature narrower than any allowed band. */
  readonly narrow?: boolean
}

export interface RecipeOptions {
  /** Exactly this many d–d bands (`fit --bands N`); absent: the criterion decides. */
  readonly bands?: number
  readonly hints?: readonly BandHint[]
}

export type RecipeChoice =
  | {
      readonly kind: 'chosen'
      readonly recipe: Recipe
      /** Other recipes that describe the spectra acceptably: their spread is the model uncertainty. Holds `recipe` too. */
      readonly admissible: readonly Recipe[]
    }
  | { readonly kind: 'none'; readonly why: string; readonly flags: readonly Flag[] }

export interface FittedComponent {
  readonly kind: 'band' | 'flank'
  /** Centre of the component. */
  readonly positionPerCm: number
  /** Repeatability, k = 1: covariance corrected for residual correlation. Null where it could not be had. */
  readonly uPositionPerCm: number | null
  /** Spread over the admissible recipes, k = 1. */
  readonly uModelPerCm: number | null
  /** Maximum of the measured curve near the component; null where the curve has none. */
  readonly maximumPerCm: number | null
  readonly uMaximumPerCm: number | null
  /** Full width at half maximum of the whole component. */
  readonly widthPerCm: number
  readonly uWidthPerCm: number | null
  readonly shape: BandShape
  readonly height: number
  readonly uHeight: number | null
}

export interface FitQuality {
  /** Height of the highest band over the median noise. */
  readonly signalToNoise: number
  /** Normal deviate of the number of runs of signs of the residuals; far below 0: what is left is structure. */
  readonly runsZ: number
  /** Points over the correlation time of the residuals. */
  readonly effectivePoints: number
  /** Of the Gram matrix scaled to a unit diagonal, by the row sums of it and its inverse; null where it is singular. */
  readonly condition: number | null
  /** What ended at a bound, in words. */
  readonly boundsHit: readonly string[]
  /** The recipe's misfit, a share of the spread of the absorbance; 0 where it reaches the noise. */
  readonly lackOfFit: number
  /** One sentence for a chemist. */
  readonly verdict: string
}

export interface FittedBackground {
  readonly constant: number
  /** Scatter at the middle of the window, absorbance. */
  readonly scatter: number
  readonly scatterExponent: number | null
  /** What a change of lamp or detector adds above its place, absorbance; null where the recipe has none. */
  readonly step: { readonly atPerCm: number; readonly height: number; readonly uHeight: number | null } | null
}

export type BandFit =
  | {
      readonly kind: 'fitted'
      readonly recipe: Recipe
      /** Ascending in position, flanks included. */
      readonly components: readonly FittedComponent[]
      /** Covariance of the positions of `components`, same order, cm⁻². Null where it could not be had. */
      readonly positionCovariance: readonly (readonly number[])[] | null
      readonly background: FittedBackground
      /** Root mean square of the residuals over the points used, absorbance. */
      readonly rms: number
      /** Median of the noise over the points used, absorbance. */
      readonly noise: number
      readonly reducedChi2: number
      readonly quality: FitQuality
      readonly points: number
      readonly windowPerCm: readonly [number, number]
      readonly iterations: number
      readonly stopped: 'relative change' | 'gradient' | 'step' | 'iterations'
      readonly flags: readonly Flag[]
    }
  | {
      readonly kind: 'unfitted'
      readonly why: string
      readonly points: number
      readonly windowPerCm: readonly [number, number] | null
      readonly flags: readonly Flag[]
    }

/** Enters of the room, see index.ts. */
export type ChooseRecipe = (spectra: readonly Spectrum[], options: RecipeOptions) => RecipeChoice
export type FitBands = (spectrum: Spectrum, recipe: Recipe, admissible: readonly Recipe[]) => BandFit

/** A band that all spectra of a common fit share. cm⁻¹, k = 1; null where held at a bound. */
export interface SharedBand {
  readonly shape: BandShape
  readonly positionPerCm: number
  readonly uPositionPerCm: number | null
  /** The width w of shapes.ts. */
  readonly widthPerCm: number
  readonly uWidthPerCm: number | null
  /** Height over that of the first band of its species. */
  readonly ratio: number
}

/** What one spectrum of a common fit has of each species, in units of its first band's height. */
export interface Amounts {
  readonly amounts: readonly number[]
  /** Given the shared bands. */
  readonly uAmounts: readonly number[]
  readonly constant: number
  /** Scatter at the middle of the points, absorbance. */
  readonly scatter: number
  /** Root mean square of the residuals, absorbance. */
  readonly rms: number
}

export type CommonFit =
  | {
      readonly kind: 'fitted'
      readonly species: readonly (readonly SharedBand[])[]
      /** In the order of the spectra. */
      readonly spectra: readonly Amounts[]
      /** Share of the spread of the absorbance by which the model misses the spectra beyond their noise. */
      readonly misfit: number
      readonly reducedChi2: number
      readonly iterations: number
      readonly stopped: 'relative change' | 'gradient' | 'step' | 'iterations'
    }
  | { readonly kind: 'unfitted'; readonly why: string }
