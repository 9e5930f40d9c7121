/**
 * The number forms of JCAMP-DX tables (McDonald & Wilks, Appl. Spectrosc. 42 (1988) 151, tables II and VI): AFFN, plain numbers;
 * PAC, with + and − as delimiters; SQZ, a letter for sign and first digit; DIF, a letter for sign and first digit of a difference; DUP,
 * a count of how often the ordinate before, or the difference before, stands in all.
 */

export interface LineOfTable {
  /** As written: not yet multiplied by XFACTOR. */
  readonly x: number
  readonly xColumn: number
  /** As text; empty where it is squeezed. */
  readonly xText: string
  /** As written; NaN for `?`. */
  readonly ordinates: readonly number[]
  /** Column of the first ordinate. */
  readonly column: number
  /** Whether the last ordinate came of a difference: then the next line repeats it as a check. */
  readonly endsInDifference: boolean
  /** Sum of the bits of `FORMS`. */
  readonly forms: number
}

export type DecodedLine =
  | { readonly kind: 'line'; readonly value: LineOfTable }
  | { readonly kind: 'wrong'; readonly column: number; readonly what: string }

export const FORMS = { AFFN: 1, PAC: 2, SQZ: 4, DIF: 8, DUP: 16 } as const

const ALPHABETS = [
  { form: FORMS.SQZ, letters: '@ABCDEFGHI', first: 0, sign: 1 },
  { form: FORMS.SQZ, letters: 'abcdefghi', first: 1, sign: -1 },
  { form: FORMS.DIF, letters: '%JKLMNOPQR', first: 0, sign: 1 },
  { form: FORMS.DIF, letters: 'jklmnopqr', first: 1, sign: -1 },
  { form: FORMS.DUP, letters: 'STUVWXYZs', first: 1, sign: 1 },
] as const

/** Of each ASCII character that leads a number: its form (0: none), its digit and its sign. */
const FORM = new Uint8Array(128)
const DIGIT = new Uint8Array(128)
const SIGN = new Int8Array(128)
for (const { form, letters, first, sign } of ALPHABETS)
  for (let k = 0; k < letters.length; k++) {
    const code = letters.charCodeAt(k)
    FORM[code] = form
    DIGIT[code] = first + k
    SIGN[code] = sign
  }

const formAt = (text: string, i: number): number => {
  const code = text.charCodeAt(i)
  return code < 128 ? FORM[code]! : 0
}

const POINT = 46
const isDigit = (code: number): boolean => code >= 48 && code <= 57

/** Where the digits, at most one point among them, end. */
const endOfDigits = (text: string, from: number): number => {
  const n = text.length
  let i = from
  while (i < n && isDigit(text.charCodeAt(i))) i++
  if (i < n && text.charCodeAt(i) === POINT) {
    i++
    while (i < n && isDigit(text.charCodeAt(i))) i++
  }
  return i
}

/** Digits of which a double holds every one. */
const SAFE_DIGITS = 15

/** The number that a letter at `at` leads and that ends before `end`. */
const ledNumber = (text: string, at: number, end: number): number => {
  const code = text.charCodeAt(at)
  let value = DIGIT[code]!
  const isPlain = end - at <= SAFE_DIGITS
  for (let i = at + 1; i < end; i++) {
    const digit = text.charCodeAt(i)
    if (digit === POINT || !isPlain) return SIGN[code]! * Number(`${DIGIT[code]}${text.slice(at + 1, end)}`)
    value = 10 * value + digit - 48
  }
  return SIGN[code]! * value
}

// an E is an exponent only with its sign and two or three digits; else it is the SQZ digit 5
const AFFN = /[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[Ee][+-]\d{2,3}(?!\d))?/y

const MOST_REPETITIONS = 100_000

/** Decodes one line of an (X++(Y..Y)) table: its abscissa and its ordinates, undone down to plain numbers. */
export const decodeLine = (text: string): DecodedLine => {
  const ordinates: number[] = []
  let column = 0
  let forms = 0
  const wrong = (at: number, what: string): DecodedLine => ({ kind: 'wrong', column: at + 1, what })
  const xAt = text.length - text.trimStart().length
  AFFN.lastIndex = xAt
  let m = AFFN.exec(text)
  let i = xAt
  let x = Number.NaN
  let xText = ''
  if (m) {
    xText = m[0]
    x = Number(xText)
    i = AFFN.lastIndex
  } else if (formAt(text, i) === FORMS.SQZ) {
    // the abscissa itself may be squeezed
    const end = endOfDigits(text, i + 1)
    x = ledNumber(text, i, end)
    i = end
  }
  if (!Number.isFinite(x)) return wrong(i, `"${text.trim().slice(0, 12)}" does not begin with an abscissa`)
  let last = Number.NaN
  let difference = 0
  let differs = false
  let doubled = false
  let separated = false
  const n = text.length
  while (i < n) {
    const code = text.charCodeAt(i)
    if (code === 32 || code === 9 || code === 44) {
      separated = true
      i++
      continue
    }
    const at = i
    const form = code < 128 ? FORM[code]! : 0
    if (ordinates.length === 0) column = at + 1
    if (form === FORMS.DUP) {
      i = endOfDigits(text, at + 1)
      const count = ledNumber(text, at, i)
      if (ordinates.length === 0) return wrong(at, 'a repetition with nothing before it')
      if (doubled) return wrong(at, 'two repetitions in a row')
      if (!Number.isInteger(count) || count > MOST_REPETITIONS || text.slice(at, i).includes('.'))
        return wrong(at, `"${text.slice(at, i)}" is no count of repetitions`)
      for (let k = 1; k < count; k++) {
        last += difference
        ordinates.push(last)
      }
    } else if (form !== 0) {
      let value = DIGIT[code]!
      let digit = 0
      for (i = at + 1; i < n; i++) {
        digit = text.charCodeAt(i) - 48
        if (digit < 0 || digit > 9) break
        value = 10 * value + digit
      }
      if (digit === POINT - 48 || i - at > SAFE_DIGITS) {
        i = endOfDigits(text, at + 1)
        value = ledNumber(text, at, i)
      } else value *= SIGN[code]!
      if (!Number.isFinite(value)) return wrong(at, `"${text.slice(at, i)}" is no number`)
      if (form === FORMS.DIF) {
        if (ordinates.length === 0) return wrong(at, 'a difference with nothing before it')
        if (Number.isNaN(last)) return wrong(at, 'a difference from a missing ordinate')
        last += value
        difference = value
        differs = true
      } else {
        last = value
        difference = 0
        differs = false
      }
      ordinates.push(last)
    } else if (code === 63) {
      last = Number.NaN
      ordinates.push(last)
      difference = 0
      differs = false
      i++
    } else {
      AFFN.lastIndex = at
      m = AFFN.exec(text)
      if (!m) return wrong(at, `"${text[at]}" stands in no number form of the table`)
      const signed = code === 43 || code === 45
      if (!separated && !signed && /[\d.]/.test(text[at - 1] ?? ' '))
        return wrong(at, `"${m[0]}" runs into the number before it`)
      last = Number(m[0])
      ordinates.push(last)
      forms |= separated ? FORMS.AFFN : FORMS.PAC
      difference = 0
      differs = false
      i = AFFN.lastIndex
    }
    forms |= form
    doubled = form === FORMS.DUP
    separated = false
  }
  return {
    kind: 'line',
    value: { x, xColumn: xAt + 1, xText, ordinates, column, endsInDifference: differs, forms },
  }
}

/** The forms in words, in the order of the standard. */
export const sayForms = (forms: number): string =>
  Object.entries(FORMS)
    .filter(([, bit]) => (forms & bit) !== 0)
    .map(([name]) => name)
    .join(' ')
