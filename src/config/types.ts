import type { BandShape } from '../bands/types.ts'
import type { Place } from '../fault.ts'
import type { Geometry, Spin } from '../ligandField/types.ts'
import type { AxisUnit, Medium, OrdinateKind, ReadingHints } from '../readers/types.ts'

/** The whole configuration, frozen, units resolved, paths absolute. Names are those of the contract's YAML. */
export interface Config {
  readonly folder: string
  /** Hash and text of all files in a fixed order: what was in force. */
  readonly sha256: string
  readonly text: string
  readonly room: string
  readonly dataFolder: string
  readonly timeZone: string
  readonly keeper: readonly string[]
  /** Minutes after midnight by the room's clock at which the daily letter is written; null: none is. */
  readonly dailyAt: number | null
  readonly quiet: readonly QuietHours[]
  readonly mail: MailSettings | null
  readonly web: WebSettings | null
  readonly instruments: readonly Instrument[]
  readonly species: readonly Species[]
  readonly studies: readonly Study[]
  readonly rules: readonly RuleDefinition[]
  readonly standards: readonly Standard[]
}

export type Secret = { readonly credential: string } | { readonly env: string } | { readonly file: string }

export interface MailSettings {
  readonly from: string
  readonly host: string
  readonly port: number
  readonly security: 'tls' | 'starttls' | 'none'
  readonly user: string | null
  readonly password: Secret | null
}

/** Hours in which a recipient's letters wait, in minutes after midnight by the room's clock; may run over midnight. */
export interface QuietHours {
  readonly to: string
  readonly from: number
  readonly until: number
}

export interface WebSettings {
  readonly host: string
  readonly port: number
  readonly token: Secret | null
}

export interface Instrument {
  readonly name: string
  readonly title: string
  readonly dropFolder: string
  /** Glob relative to the drop folder. */
  readonly files: string
  /** How arrivals are noticed; `auto` polls network file systems, which send no events. */
  readonly watch: 'auto' | 'events' | 'polling'
  readonly reading: ReadingHints
  readonly sampleFrom: 'filename' | 'folder' | 'header'
  /** Named groups `sample` and optionally `time`. Null with `header`, or to take the whole name. */
  readonly samplePattern: string | null
  readonly absorbanceLimit: number
  readonly wavelength: { readonly repeatabilityNm: number; readonly accuracyNm: number; readonly bandwidthNm: number }
  readonly everyMs: number | null
}

export interface ExpectedBand {
  readonly role: string
  /** Vacuum wavenumber, cm⁻¹ (wavelengths are converted as in air). */
  readonly nearPerCm: number
  readonly withinPerCm: number
  readonly shape: BandShape['kind']
  /** A narrow spin-forbidden feature on broad bands. */
  readonly narrow: boolean
}

export interface Species {
  readonly name: string
  readonly title: string
  readonly ion: string
  readonly geometry: Geometry
  readonly spin: Spin | null
  readonly state: 'solution' | 'solid'
  readonly ligands: Readonly<Record<string, number>>
  readonly bands: readonly ExpectedBand[]
  readonly mayBecome: readonly {
    readonly ligands: Readonly<Record<string, number>>
    readonly cause: string
    readonly nearPerCm: Readonly<Record<string, number>>
  }[]
}

export type Reference =
  | { readonly kind: 'first'; readonly occasions: number }
  | { readonly kind: 'sample'; readonly sample: string }
  | { readonly kind: 'values'; readonly values: Readonly<Record<string, readonly [value: number, u: number]>> }

export interface Study {
  readonly name: string
  readonly title: string
  /** Null only for a check study that measures a standard. */
  readonly species: string | null
  /** Name of the standard that a check study is compared with. */
  readonly standard: string | null
  readonly kind: 'stability' | 'repeat' | 'check'
  /** `name` is exact or holds wildcards. */
  readonly samples: readonly { readonly name: string; readonly control: boolean }[]
  readonly temperatureC: number | null
  readonly measuredAtC: number | null
  readonly pathMm: number | null
  readonly concentrationMolPerL: number | null
  readonly solvent: string | null
  readonly began: number | null
  readonly ends: number | null
  readonly everyMs: number | null
  readonly scheduleMs: readonly number[] | null
  readonly replicatesWithinMs: number | null
  readonly reference: Reference
  /** Nothing is compared with a reference before a person has approved it. */
  readonly approveReference?: boolean
  /** By quantity name of the rule language; bounds in that quantity's unit (max1 … in nm as typed are kept in cm⁻¹ ascending). */
  readonly acceptance: Readonly<
    Record<string, { readonly pass: readonly [number, number]; readonly look: readonly [number, number] | null }>
  >
  readonly tell: readonly string[]
  readonly escalate: { readonly afterMs: number; readonly to: readonly string[] } | null
}

export type Priority = 'low' | 'medium' | 'high'
export type RuleSubject = 'sample' | 'instrument' | 'study'

/** Text of an expression with the place it stands at, so that a fault in it is reported there. */
export interface RuleText {
  readonly text: string
  readonly place: Place
}

export interface RuleDefinition {
  readonly name: string
  readonly title: string
  readonly of: RuleSubject
  readonly studies: readonly string[]
  readonly persist: number
  readonly priority: Priority
  readonly latch: boolean
  readonly place: Place
  readonly condition:
    | { readonly kind: 'expression'; readonly when: RuleText; readonly clear: RuleText | null }
    | {
        readonly kind: 'chart'
        readonly chart: 'shewhart' | 'ewma' | 'cusum'
        readonly quantity: RuleText
        /** CUSUM k and h, EWMA lambda and l, Shewhart rule numbers. */
        readonly k: number
        readonly h: number
        readonly lambda: number
        readonly l: number
        /** Shewhart: tests by name, `western-electric-1` … `nelson-8`; absent: one point beyond `l` σ. */
        readonly tests?: readonly string[]
      }
    | { readonly kind: 'overdue'; readonly times: number }
    | { readonly kind: 'always'; readonly rule: 'unjudged' | 'not-this-species' | 'common-change' }
}

export interface Standard {
  readonly name: string
  readonly title: string
  /** Certificate or publication that the figures come from. */
  readonly source: string
  readonly lines: readonly {
    readonly nm: number
    readonly uNm: number | null
    readonly absorbance: number | null
    readonly uAbsorbance: number | null
  }[]
}

export type { AxisUnit, Medium, OrdinateKind }
