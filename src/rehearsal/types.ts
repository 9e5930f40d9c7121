import type { ExpectedBand, Priority, Study } from '../config/types.ts'
import type { SpectrumRow } from '../series/occasions.ts'
import type { ReferenceState, Standing } from '../series/types.ts'

/** A stored spectrum of a sample, as it is judged once more. */
export interface ReplayRow extends SpectrumRow {
  readonly sample: string
  readonly instrument: string
  /** Hash of the recipe; only spectra of one recipe stand in one window. */
  readonly recipe: string | null
  readonly fit: Standing['fit']
}

/** What one sample is compared with on one instrument, as it changed with time. */
export interface ReferenceTimeline {
  /** Times of the occasions that the first reference is gathered from, and how many it needs. */
  readonly gatheredAt: readonly number[]
  readonly need: number
  /** Ascending; each holds for spectra measured after `after`. */
  readonly changes: readonly { readonly after: number; readonly state: ReferenceState }[]
}

/** A sample with everything that judging it asks for beside its spectra. */
export interface ReplaySample {
  readonly sample: string
  readonly study: Study
  readonly expected: readonly ExpectedBand[]
  /** Origin of `age`. */
  readonly began: number | null
  /** Medium of the axis, and the reference, by instrument. */
  readonly on: Readonly<Record<string, { readonly medium: 'air' | 'vacuum'; readonly reference: ReferenceTimeline }>>
  /** Of all instruments, ascending in time. */
  readonly rows: readonly ReplayRow[]
}

/** Only what was measured at this time or later is counted; what came before makes references and windows. */
export interface Span {
  /** Epoch milliseconds; −∞ for all. */
  readonly since: number
}

/** An alarm that the rules would have raised. Times are those of measurement, epoch milliseconds. */
export interface WouldBeAlarm {
  readonly rule: string
  readonly of: 'sample' | 'instrument'
  readonly subject: string
  readonly priority: Priority
  /** Instrument and spectrum that made it ring. */
  readonly instrument: string
  readonly spectrum: number
  readonly raisedAt: number
  /** First of the occasions in a row on which the rule rang. */
  readonly since: number
  /** Null while it stands at the end of the history. */
  readonly clearedAt: number | null
}

/** How often a rule could and could not decide. */
export interface RuleCount {
  readonly rule: string
  readonly spectra: number
  /** Spectra on which history or reference were still too short. */
  readonly gathering: number
  /** Spectra on which a value was missing. */
  readonly undecided: number
  /** Occasions on which it decided; replicates count once. */
  readonly occasions: number
}

export interface Replayed {
  readonly alarms: readonly WouldBeAlarm[]
  readonly counts: readonly RuleCount[]
}
