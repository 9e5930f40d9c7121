import type { Window } from '../series/types.ts'

/**
 * Numbers while a rule runs are plain numbers in base units, NaN where one could not be had; truth is a small integer.
 * Neither leaves the room: `judge` turns them into tagged outcomes.
 *
 * Undecided comes in two strengths, and where both meet the stronger is told: a missing value is a fault that somebody
 * must hear of, a history that is still gathering is none. With this order three-valued logic (Kleene) is `and` = 0 if
 * either is 0, else the larger; `or` = 1 if either is 1, else the larger.
 */
export type Truth = 0 | 1 | 2 | 3
export const NO = 0
export const YES = 1
export const GATHERING = 2
export const MISSING = 3

/** What a rule sees while it runs, and where its parts note why they have no number. */
export interface Frame {
  readonly window: Window
  /** Index of the occasion judged. */
  readonly last: number
  /** Strongest reason noted since the comparison at hand began; NO when none was. */
  noted: typeof NO | typeof GATHERING | typeof MISSING
  gathering: string | null
  missing: string | null
}

export type NumberOf = (frame: Frame) => number
export type TruthOf = (frame: Frame) => Truth

export const frameOf = (window: Window): Frame => ({
  window,
  last: window.occasions.length - 1,
  noted: NO,
  gathering: null,
  missing: null,
})

/** No number, because the history or the reference does not reach so far. */
export const gathering = (frame: Frame, what: string): number => {
  if (frame.noted === NO) frame.noted = GATHERING
  frame.gathering ??= what
  return Number.NaN
}

/** No number, because a value could not be had. */
export const missing = (frame: Frame, what: string): number => {
  frame.noted = MISSING
  frame.missing ??= what
  return Number.NaN
}

export const not = (a: Truth): Truth => (a === NO ? YES : a === YES ? NO : a)
export const and = (a: Truth, b: Truth): Truth => (a === NO || b === NO ? NO : a > b ? a : b)
export const or = (a: Truth, b: Truth): Truth => (a === YES || b === YES ? YES : a > b ? a : b)
