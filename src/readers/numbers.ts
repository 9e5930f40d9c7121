/**
 * Numbers, strictly: a text is a number as a whole under one decimal mark, or it is none. Thousands marks are admitted only where
 * they stand in groups of three, all alike, and never where they could be the decimal mark in force.
 */

export type DecimalMark = '.' | ','

const FORMS: Readonly<Record<DecimalMark, { readonly plain: RegExp; readonly grouped: RegExp }>> = {
  '.': {
    plain: /^[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eEdD][+-]?\d{1,3})?$/,
    grouped: /^[+-]?[1-9]\d{0,2}(?:(?:,\d{3})+|(?:['’]\d{3})+|(?:[\u00a0\u2009\u202f ]\d{3})+)(?:\.\d*)?$/,
  },
  ',': {
    plain: /^[+-]?(?:\d+(?:,\d*)?|,\d+)(?:[eEdD][+-]?\d{1,3})?$/,
    grouped: /^[+-]?[1-9]\d{0,2}(?:(?:\.\d{3})+|(?:['’]\d{3})+|(?:[\u00a0\u2009\u202f ]\d{3})+)(?:,\d*)?$/,
  },
}

/** The number a text is under this decimal mark, or null. `−` (U+2212) and `–` are minus; `D` is an exponent as `E`. */
export const numberOf = (text: string, decimal: DecimalMark): number | null => {
  const fast = plainNumber(text, 0, text.length, decimal)
  if (!Number.isNaN(fast)) return fast
  const form = FORMS[decimal]
  const t =
    text.charCodeAt(0) > 127 || text.includes('\u2212') || text.includes('–') ? text.replace(/[\u2212–]/g, '-') : text
  if (form.plain.test(t)) return finite(decimal === ',' ? t.replace(',', '.') : t)
  if (!form.grouped.test(t)) return null
  return finite(
    t.replace(decimal === '.' ? /[,'’\u00a0\u2009\u202f ]/g : /[.'’\u00a0\u2009\u202f ]/g, '').replace(',', '.'),
  )
}

/** 10⁰ to 10²²: the powers of ten that a double holds exactly. */
const POWERS = Array.from({ length: 23 }, (_, k) => Number(`1e${k}`))
const isDigit = (code: number): boolean => code >= 48 && code <= 57

/**
 * The number written in `text` from `from` to `to` in its plain form (digits, decimal mark, exponent), NaN where it has another
 * form or is none. Up to 15 digits are a whole number that a double holds exactly, and so is a power of ten up to 10²²: their
 * quotient or product is rounded once, which is what `Number` gives (Clinger 1990).
 */
export const plainNumber = (text: string, from: number, to: number, decimal: DecimalMark): number => {
  const mark = decimal.charCodeAt(0)
  let i = from
  const sign = text.charCodeAt(i)
  if (sign === 45 || sign === 43) i++
  let whole = 0
  let digits = 0
  let significant = 0
  let point = -1
  for (; i < to; i++) {
    const code = text.charCodeAt(i)
    if (isDigit(code)) {
      whole = 10 * whole + code - 48
      digits++
      if (whole > 0) significant++
    } else if (code === mark && point < 0) point = digits
    else break
  }
  if (digits === 0 || significant > 15) return Number.NaN
  let power = point < 0 ? 0 : point - digits
  if (i < to) {
    const exponent = exponentIn(text, i, to)
    if (exponent === null) return Number.NaN
    power += exponent
  }
  if (power < -22 || power > 22) return Number.NaN
  const value = power < 0 ? whole / POWERS[-power]! : whole * POWERS[power]!
  return sign === 45 ? -value : value
}

/** `E-02`, `d+1`: a letter, a sign or none, one to three digits. */
const exponentIn = (text: string, from: number, to: number): number | null => {
  const letter = text.charCodeAt(from) | 32
  if (letter !== 101 && letter !== 100) return null
  const sign = text.charCodeAt(from + 1)
  const first = sign === 45 || sign === 43 ? from + 2 : from + 1
  if (to - first < 1 || to - first > 3) return null
  let exponent = 0
  for (let i = first; i < to; i++) {
    const code = text.charCodeAt(i)
    if (!isDigit(code)) return null
    exponent = 10 * exponent + code - 48
  }
  return sign === 45 ? -exponent : exponent
}

const finite = (text: string): number | null => {
  const value = Number(text.replace(/[dD]/, 'e'))
  return Number.isFinite(value) ? value : null
}

const MISSING = /^(?:|-{1,3}|\?|nan|n\/?a|null|none|missing|fehlt|manquant|nd)$/i
const OVERFLOW =
  /^(?:\+?inf(?:inity)?|\+?∞|o?ver(?:flow|range|load)?|ovr(?:flw)?|sat(?:urated|\.)?|\*{2,}|#{2,}|uberlauf|überlauf|gesättigt|saturé|saturado)$/i

/** An ordinate: a number, NaN for a word that says it is missing, +Infinity for one that says it was too large, or null. */
export const ordinateOfText = (text: string, decimal: DecimalMark): number | null => {
  const value = numberOf(text, decimal)
  // no word begins with a digit
  if (value !== null || isDigit(text.charCodeAt(0))) return value
  if (MISSING.test(text)) return Number.NaN
  return OVERFLOW.test(text) ? Infinity : null
}
