import type { Priority } from '../config/types.ts'
import type { Evidence } from '../rules/types.ts'

/** Facts of an alarm, frozen when it changed; text is made from them at sending. JSON-serialisable. */
export interface AlarmFacts {
  readonly kind: 'alarm'
  readonly event: 'raised' | 'returned' | 're-alarmed' | 'suppressed'
  readonly room: string
  readonly alarm: number
  readonly rule: string
  readonly ruleTitle: string
  /** The rule's `when` as the person wrote it, or the chart in words. */
  readonly ruleText: string
  readonly priority: Priority
  readonly of: 'sample' | 'instrument' | 'study'
  readonly subject: string
  readonly study: string | null
  readonly species: string | null
  readonly speciesTitle: string | null
  readonly instrument: string | null
  /** ISO 8601 with offset, room's zone. */
  readonly measuredAt: string | null
  readonly since: string | null
  /** Occasions over which the rule has rung in a row. */
  readonly spectra: number
  readonly evidence: readonly Evidence[]
  /** Δo, B before and now, where they exist. */
  readonly parameters: readonly Evidence[]
  readonly diagnosis: string
  readonly confidence: number | null
  /** In words: what it may mean, on what evidence. */
  readonly meaning: string
  readonly check: readonly string[]
  readonly cautions: readonly string[]
  readonly file: string | null
  /** Other alarms of the same subject that the same spectrum rang, a line each. */
  readonly also?: readonly string[]
  /** Numbers of those alarms. */
  readonly alsoAlarms?: readonly number[]
  /** Of a common change: each sample and how far it moved, a line each. */
  readonly samples?: readonly string[]
  /** Of a common change: alarms that say the same and are silent therefore, a line each. */
  readonly silenced?: readonly string[]
  /** Of a suppressed alarm: the alarm that explains it, in words. */
  readonly explainedBy?: string
}

export interface TestFacts {
  readonly kind: 'test'
  readonly room: string
  readonly at: string
}

/** What the keeper hears every day. Lines are sentences as they are printed. */
export interface DailyFacts {
  readonly kind: 'daily'
  readonly room: string
  /** Of the room's calendar. */
  readonly day: string
  /** ISO 8601 with offset. */
  readonly since: string
  readonly until: string
  readonly spectra: number
  readonly samples: number
  readonly repeated: number
  readonly pending: number
  readonly letters: { readonly sent: number; readonly waiting: number; readonly failed: number }
  readonly instruments: readonly string[]
  readonly troubles: readonly string[]
  readonly alarms: readonly string[]
  readonly stale: readonly string[]
  readonly chattering: readonly string[]
  readonly silent: readonly string[]
  readonly setAside: readonly string[]
  readonly unknownSamples: readonly string[]
  readonly undecided: readonly string[]
  readonly gathering: readonly string[]
  readonly decisions: readonly string[]
}

/** Letters to one recipient in a flood of alarms, most urgent first. */
export interface DigestFacts {
  readonly kind: 'digest'
  readonly room: string
  /** Highest of what it holds: `high` is not held back by quiet hours. */
  readonly priority: Priority
  readonly letters: readonly { readonly alarm: number; readonly subject: string }[]
  readonly cautions: readonly string[]
}

export type LetterFacts = AlarmFacts | TestFacts | DailyFacts | DigestFacts

/** The trend beside the figures. `failed`: there should be one, and the letter says that there is not. */
export type LetterPicture =
  | {
      readonly kind: 'drawn'
      readonly cid: string
      readonly png: Uint8Array
      readonly alt: string
      readonly widthPx: number
    }
  | { readonly kind: 'failed'; readonly why: string }

/** What goes into a message. */
export interface LetterText {
  readonly picture?: Extract<LetterPicture, { kind: 'drawn' }>
  readonly subject: string
  readonly text: string
  readonly html: string
}

/** Outcome of one attempt for one recipient. */
export type Delivery =
  | { readonly kind: 'sent' }
  /** `unreachable`: the server itself could not be reached, so no other letter would fare better now. */
  | { readonly kind: 'later'; readonly why: string; readonly unreachable?: boolean }
  | { readonly kind: 'refused'; readonly why: string }
