import type { RuleDefinition } from '../config/types.ts'
import type { Fault } from '../fault.ts'
import type { Window } from '../series/types.ts'

/** Three-valued outcome of one rule on one occasion. */
export type Outcome =
  | { readonly kind: 'rings' }
  | { readonly kind: 'clears' }
  /** Between `clear` and `when`: neither. */
  | { readonly kind: 'holds' }
  /** `gathering`: history or reference still too short, no fault. `missing`: a value is null. */
  | { readonly kind: 'undecided'; readonly because: 'gathering' | 'missing'; readonly what: string }

export interface Judgement {
  readonly outcome: Outcome
  /** Figures behind it for the letter: name, value, unit, u and reference where they exist. */
  readonly evidence: readonly Evidence[]
}

export interface Evidence {
  readonly name: string
  readonly unit: string
  readonly value: number | null
  readonly u: number | null
  readonly reference: number | null
  readonly uReference: number | null
}

export interface CompiledRule {
  readonly definition: RuleDefinition
  /** Names it looks at. */
  readonly quantities: readonly string[]
  /** How many occasions of history it needs at the most; Infinity for a chart. */
  readonly lookBack: number
  judge(window: Window): Judgement
}

export type Compilation =
  | { readonly kind: 'compiled'; readonly rule: CompiledRule }
  | { readonly kind: 'refused'; readonly faults: readonly [Fault, ...Fault[]] }
