import type { Fault } from '../fault.ts'

export type AxisUnit = 'nm' | 'um' | 'cm^-1' | 'eV'
export type Medium = 'air' | 'vacuum'
export type OrdinateKind =
  | 'absorbance'
  | 'transmittance'
  | 'percent-transmittance'
  | 'reflectance'
  | 'percent-reflectance'
  | 'kubelka-munk'

/** What a person has said about a file's layout; whatever is absent the reader works out or refuses. */
export interface ReadingHints {
  readonly x?: AxisUnit
  readonly medium?: Medium
  readonly y?: OrdinateKind
  readonly delimiter?: string
  readonly decimal?: '.' | ','
  /** Whether a spectrum of delimited text runs down a column or along a row. */
  readonly layout?: 'columns' | 'rows'
}

/** A time as the file writes it. `offset` is null where the file gives local time without a zone. */
export interface WrittenTime {
  /** `YYYY-MM-DDTHH:MM:SS(.sss)`, no offset. */
  readonly local: string
  /** `Z` or `±HH:MM`. */
  readonly offset: string | null
}

/** One spectrum as the file holds it: order, units and direction of the file, nothing converted. */
export interface RawSpectrum {
  /** Position in the file, from 0. */
  readonly index: number
  readonly x: Float64Array
  /** Same length as `x`; NaN marks an ordinate that the file declares missing, +Infinity an overflow word. */
  readonly y: Float64Array
  readonly xUnit: AxisUnit
  /** What the file itself says of the medium; null where it says nothing. */
  readonly medium: Medium | null
  readonly yKind: OrdinateKind
  readonly sample: string | null
  readonly title: string | null
  readonly time: WrittenTime | null
  readonly pathMm: number | null
  readonly temperatureC: number | null
  readonly concentrationMolPerL: number | null
  /** Header labels (lower case) and values as found, for `inspect` and for the record. */
  readonly header: Readonly<Record<string, string>>
  /** Things a person should know that do not move the axis (FIRSTY, extrema, …). */
  readonly warnings: readonly Fault[]
}

export type Reading =
  | {
      readonly kind: 'read'
      /** `delimited text`, `JCAMP-DX 4.24`, … */
      readonly format: string
      /** In words: delimiter, decimal mark, encoding, table form. */
      readonly dialect: string
      readonly spectra: readonly RawSpectrum[]
      readonly warnings: readonly Fault[]
    }
  | {
      readonly kind: 'refused'
      readonly format: string | null
      readonly faults: readonly [Fault, ...Fault[]]
      /** YAML that a person can paste under `reading:` to settle it, where there are several readings. */
      readonly settle: readonly string[]
      /** Spectra of the same file that read well (a file with several, one of them broken). */
      readonly spectra: readonly RawSpectrum[]
    }

/** A reader looks at bytes and says how sure it is (0 to 1) that the file is its own, then reads. Pure. */
export interface Reader {
  readonly format: string
  confidence(bytes: Uint8Array): number
  read(bytes: Uint8Array, file: string, hints: ReadingHints): Reading
}
