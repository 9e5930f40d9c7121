import type { RuleText } from '../config/types.ts'
import type { Fault, Place } from '../fault.ts'
import type { Objection } from './tokens.ts'

/** A fault in an expression at its place in the file: the text begins at `place`, the offset counts from there. */
export const faultAt = ({ text, place }: RuleText, { code, offset, what, remedy }: Objection): Fault => ({
  code,
  place: placeAt(text, place, offset),
  what,
  remedy,
})

/** On later lines of a text of several lines the indentation is not known: the line is told, the column is not. */
const placeAt = (text: string, { at, line, column }: Place, offset: number): Place => {
  if (line === undefined) return { at }
  const lines = text.slice(0, offset).split('\n').length - 1
  if (lines > 0) return { at, line: line + lines }
  return column === undefined ? { at, line } : { at, line, column: column + offset }
}
