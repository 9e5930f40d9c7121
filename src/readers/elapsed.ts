/** Time that has passed since a start: headings such as `Time (s)`, cells such as `30 s`. */
import type { WrittenTime } from './types.ts'
import { plainWords } from './words.ts'

const UNITS: readonly (readonly [seconds: number, word: RegExp])[] = [
  [1e-3, /^(?:ms|msec|milliseconds?|millisekunden?|millisecondes?|milisegundos?)$/],
  [1, /^(?:s|sec|secs|seconds?|sek|sekunden?|secondes?|seg|segundos?)$/],
  [60, /^(?:min|mins|minutes?|minuten?|minutos?)$/],
  [3600, /^(?:h|hr|hrs|hours?|std|stunden?|heures?|horas?)$/],
  [86_400, /^(?:d|days?|tage?|jours?|dias?)$/],
]
const secondsIn = (unit: string): number | null => UNITS.find(([, word]) => word.test(unit))?.[0] ?? null

const TIME = /\b(?:elapsed|time|zeit|\p{L}*zeit|temps|tiempo|dauer|duree|duracion|t)\b/u

/** Whether a heading speaks of time at all. */
export const namesTime = (heading: string): boolean => TIME.test(plainWords(heading))

/** Seconds in the unit that the heading of a time names (`Time (s)`, `Zeit / min`, `t [h]`), or null. */
export const secondsPerUnit = (heading: string): number | null => {
  const text = plainWords(heading)
  if (!TIME.test(text)) return null
  for (const word of text.split(/[^\p{L}]+/u)) {
    const seconds = word === 't' ? null : secondsIn(word)
    if (seconds !== null) return seconds
  }
  return null
}

/** Seconds that a text such as `30 s` or `t = 2,5 min` says, or null. */
export const elapsedOf = (text: string): number | null => {
  const m = /^(?:t\s*=\s*)?([+-]?\d+(?:[.,]\d+)?)\s*(\p{L}+)$/u.exec(plainWords(text))
  const unit = m ? secondsIn(m[2]!) : null
  return unit === null ? null : Number(m![1]!.replace(',', '.')) * unit
}

/** The time so many seconds later, by the same clock; to the millisecond. */
export const later = ({ local, offset }: WrittenTime, seconds: number): WrittenTime => {
  const moment = new Date(Date.parse(`${local}Z`) + Math.round(seconds * 1000))
  return {
    local: moment
      .toISOString()
      .slice(0, -1)
      .replace(/\.000$/, ''),
    offset,
  }
}
