/** States of IEC 62682 / ISA-18.2, as the contract names them. */
export type AlarmState =
  | 'normal'
  | 'unacknowledged'
  | 'acknowledged'
  | 'returned-unacknowledged'
  | 'latched-unacknowledged'
  | 'latched-acknowledged'
  | 'shelved'
  | 'suppressed-by-design'
  | 'out-of-service'

/** What can happen to an alarm. `rings`/`clears` come from a rule after `persist`; the rest from people and time. */
export type AlarmInput =
  | 'rings'
  | 'clears'
  | 'acknowledge'
  | 'reset'
  | 'shelve'
  | 'unshelve'
  | 'suppress'
  | 'unsuppress'
  | 'out-of-service'
  | 'return-to-service'
  | 're-alarm'

/** Everything the life of one alarm (a rule and a subject) depends on. */
export interface AlarmLife {
  readonly state: AlarmState
  /** Whether the condition is true now; kept while shelved, suppressed or out of service. */
  readonly active: boolean
  /** Consecutive occasions on which the rule rang. */
  readonly consecutive: number
  readonly latch: boolean
  /** A latching alarm that was active before or while it was silenced: it still waits for its reset. */
  readonly latched?: boolean
}

/** What the world should hear of a step. */
export type AlarmNotice =
  | 'raised'
  | 'returned'
  | 'acknowledged'
  | 're-alarmed'
  | 'reset'
  | 'shelved'
  | 'unshelved'
  | 'none'

export type AlarmStep =
  | { readonly kind: 'stepped'; readonly life: AlarmLife; readonly notice: AlarmNotice }
  | { readonly kind: 'refused'; readonly why: string }
