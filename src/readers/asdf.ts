/**
 * The number forms of JCAMP-DX tables (McDonald & Wilks, Appl. Spectrosc. 42 (1988) 151, tables II and VI): AFFN, plain numbers;
 * PAC, with + and − as delimiters; SQZ, a letter for sign and first digit; DIF, a letter for sign and first digit of a difference; DUP,
 * a count of how often the ordinate before, or the difference before, stands in all.
 */

export interface LineOfTable {
  /** As written: not yet multiplied by XFACTOR. */
  readonly x: number
  readonly xColumn: number
  /** As written; NaN for `?`. */
  readonly ordinates: readonly number[]
  readonly columns: readonly number[]
  /** Whether the last ordinate came of a difference: then the next line repeats it as a check. */
  readonly endsInDifference: boolean
  readonly forms: ReadonlySet<'AFFN' | 'PAC' | 'SQZ' | 'DIF' | 'DUP'>
}

export type DecodedLine =
  | { readonly kind: 'line'; readonly value: LineOfTable }
  | { readonly kind: 'wrong'; readonly column: number; readonly what: string }

const SQZ = '@ABCDEFGHIabcdefghi'
const DIF = '%JKLMNOPQRjklmnopqr'
const DUP = 'STUVWXYZs'

const signedDigit = (alphabet: string, letter: string): number => {
  const at = alphabet.indexOf(letter)
  return at <= 9 ? at : 9 - at
}

// an E is an exponent only with its sign and two or three digits; else it is the SQZ digit 5
const AFFN = /[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[Ee][+-]\d{2,3}(?!\d))?/y
const REST = /\d*(?:\.\d*)?/y

/** Decodes one line of an (X++(Y..Y)) table: its abscissa and its ordinates, undone down to plain numbers. */
export const decodeLine = (text: string): DecodedLine => {
  const ordinates: number[] = []
  const columns: number[] = []
  const forms = new Set<'AFFN' | 'PAC' | 'SQZ' | 'DIF' | 'DUP'>()
  const wrong = (at: number, what: string): DecodedLine => ({ kind: 'wrong', column: at + 1, what })
  let i = text.length - text.trimStart().length
  const xAt = i
  AFFN.lastIndex = i
  let m = AFFN.exec(text)
  let x: number | null = null
  if (m) {
    x = Number(m[0])
    i = AFFN.lastIndex
  } else if (SQZ.includes(text[i] ?? ' ')) {
    // the abscissa itself may be squeezed
    REST.lastIndex = i + 1
    const rest = REST.exec(text)![0]
    const lead = signedDigit(SQZ, text[i]!)
    x = Number(`${lead < 0 || Object.is(lead, -0) ? '-' : ''}${Math.abs(lead)}${rest}`)
    i += 1 + rest.length
  }
  if (x === null || !Number.isFinite(x))
    return wrong(i, `"${text.trim().slice(0, 12)}" does not begin with an abscissa`)
  let difference: number | null = null
  let doubled = false
  let separated = false
  while (i < text.length) {
    const c = text[i]!
    if (c === ' ' || c === '\t' || c === ',') {
      separated = true
      i++
      continue
    }
    const at = i
    const push = (value: number) => {
      ordinates.push(value)
      columns.push(at + 1)
    }
    if (c === '?') {
      push(Number.NaN)
      difference = null
      doubled = false
      i++
    } else if (DUP.includes(c)) {
      REST.lastIndex = i + 1
      const rest = REST.exec(text)![0]
      const count = Number(`${DUP.indexOf(c) + 1}${rest}`)
      if (ordinates.length === 0) return wrong(at, 'a repetition with nothing before it')
      if (doubled) return wrong(at, 'two repetitions in a row')
      if (rest.includes('.') || count > 100_000) return wrong(at, `"${c}${rest}" is no count of repetitions`)
      for (let k = 1; k < count; k++) push(ordinates.at(-1)! + (difference ?? 0))
      forms.add('DUP')
      doubled = true
      i += 1 + rest.length
    } else if (SQZ.includes(c) || DIF.includes(c)) {
      const alphabet = SQZ.includes(c) ? SQZ : DIF
      REST.lastIndex = i + 1
      const rest = REST.exec(text)![0]
      const lead = signedDigit(alphabet, c)
      const value = Number(`${lead < 0 ? '-' : ''}${Math.abs(lead)}${rest}`)
      if (!Number.isFinite(value)) return wrong(at, `"${c}${rest}" is no number`)
      if (alphabet === SQZ) {
        push(value)
        difference = null
      } else {
        if (ordinates.length === 0) return wrong(at, 'a difference with nothing before it')
        if (Number.isNaN(ordinates.at(-1)!)) return wrong(at, 'a difference from a missing ordinate')
        push(ordinates.at(-1)! + value)
        difference = value
      }
      forms.add(alphabet === SQZ ? 'SQZ' : 'DIF')
      doubled = false
      i += 1 + rest.length
    } else {
      AFFN.lastIndex = i
      m = AFFN.exec(text)
      if (!m) return wrong(at, `"${c}" stands in no number form of the table`)
      const signed = c === '+' || c === '-'
      if (!separated && !signed && ordinates.length + 1 > 0 && /[\d.]/.test(text[at - 1] ?? ' '))
        return wrong(at, `"${m[0]}" runs into the number before it`)
      push(Number(m[0]))
      forms.add(separated ? 'AFFN' : 'PAC')
      difference = null
      doubled = false
      i = AFFN.lastIndex
    }
    separated = false
  }
  return {
    kind: 'line',
    value: { x, xColumn: xAt + 1, ordinates, columns, endsInDifference: difference !== null, forms },
  }
}
