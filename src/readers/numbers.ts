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
  const form = FORMS[decimal]
  const t =
    text.charCodeAt(0) > 127 || text.includes('\u2212') || text.includes('–') ? text.replace(/[\u2212–]/g, '-') : text
  if (form.plain.test(t)) return finite(decimal === ',' ? t.replace(',', '.') : t)
  if (!form.grouped.test(t)) return null
  return finite(
    t.replace(decimal === '.' ? /[,'’\u00a0\u2009\u202f ]/g : /[.'’\u00a0\u2009\u202f ]/g, '').replace(',', '.'),
  )
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
  if (value !== null) return value
  if (MISSING.test(text)) return Number.NaN
  return OVERFLOW.test(text) ? Infinity : null
}
