import type { Medium, OrdinateKind } from '../readers/types.ts'

/** Flags of the contract; `null` beside a number is explained by one of them. */
export type Flag =
  | 'saturated'
  | 'negative'
  | 'spike'
  | 'lamp-step'
  | 'gap'
  | 'outside-window'
  | 'not-converged'
  | 'ill-conditioned'
  | 'impossible-ratio'
  | 'split'
  | 'jahn-teller'
  | 'ambiguous-assignment'
  | 'at-bound'
  | 'superseded'
  | 'time-from-file-date'
  | 'too-few-points'
  | 'no-band'
  | 'misfit'
  | 'single-band'
  | 'c-from-table'
  | 'unknown-sample'

/** A spectrum ready to be fitted. All arrays have one length; wavenumbers ascend strictly. */
export interface Spectrum {
  /** Vacuum wavenumber, cm⁻¹. */
  readonly wavenumberPerCm: Float64Array
  /** Decadic absorbance, or the Kubelka–Munk function for diffuse reflectance. NaN where missing. */
  readonly absorbance: Float64Array
  /** Standard deviation of each absorbance, estimated locally and grown with 10^A. Positive. */
  readonly noise: Float64Array
  /** 1 where the point enters a fit, 0 where it is masked (saturated, spike, missing). */
  readonly used: Uint8Array
  readonly ordinate: 'absorbance' | 'kubelka-munk'
  /** Medium in which wavelengths are reported back: `maximum_nm` is a wavelength in this medium. */
  readonly medium: Medium
  readonly pathMm: number | null
  readonly flags: readonly Flag[]
  /** One sentence a flag: where, how many points. */
  readonly remarks: readonly string[]
}

export interface PrepareOptions {
  /** Applies where the file says nothing. */
  readonly medium: Medium
  /** Absorbance above which a point is saturated and masked. */
  readonly absorbanceLimit: number
  /** Spectral bandwidth, nm; neighbouring points closer than this are not independent. */
  readonly bandwidthNm: number
  /** Set by hand, wins over what the file says. */
  readonly y?: OrdinateKind
}
