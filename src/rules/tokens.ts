import { unitOf } from './dimension.ts'
import { suggestion } from './suggest.ts'
import { FUNCTIONS, KEYWORDS, NAMES, WORDS } from './vocabulary.ts'

/**
 * First gate of the rule language: the text is cut into numbers, words and signs, each with its offset, and whatever is
 * not on a list is refused before any parser sees it. The parser's tree carries no positions; these tokens do.
 */
export interface Token {
  readonly kind: 'number' | 'word' | 'sign'
  readonly text: string
  readonly offset: number
}

/** Something wrong at an offset of the text. */
export interface Objection {
  readonly code: string
  readonly offset: number
  readonly what: string
  readonly remedy: string
}

export type Scan =
  | { readonly kind: 'scanned'; readonly text: string; readonly tokens: readonly Token[] }
  | { readonly kind: 'refused'; readonly objections: readonly [Objection, ...Objection[]] }

/** A rule that a person can read is shorter; longer text would only serve to exhaust the parser. */
const LONGEST = 2000
const MOST_TOKENS = 500
const DEEPEST = 30

const TOKEN =
  /(?<space>\s+)|(?<number>(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?)|(?<word>[A-Za-z_μ][A-Za-z0-9_μ]*)|(?<sign>==|!=|<=|>=|[-+*/^<>?:(),])/uy

/** What people write from habit, and what it is called here. */
const INSTEAD: ReadonlyMap<string, string> = new Map([
  ['=', 'compare with =='],
  ['&', 'write and'],
  ['|', 'write or'],
  ['!', 'write not'],
  ['≥', 'write >='],
  ['≤', 'write <='],
  ['≠', 'write !='],
  ['−', 'write the plain minus -'],
  ['–', 'write the plain minus -'],
  ['×', 'write *'],
  ['·', 'write *'],
  ['°', 'write degC'],
  ['⁻', 'write cm^-1'],
  ['Δ', 'write delta_o'],
  ['ν', 'write nu1, nu2 …'],
  ['%', 'write the fraction, 0.05 for five per cent'],
  ['[', 'a window is written mean(nu1, 5)'],
])

/** Cuts a text into admitted tokens, or names everything in it that is not admitted. Never throws. */
export const scan = (written: string): Scan => {
  if (written.length > LONGEST)
    return refused([
      {
        code: 'rule-too-long',
        offset: LONGEST,
        what: `the expression has ${written.length} characters, at most ${LONGEST} are read`,
        remedy: 'split it into several rules',
      },
    ])
  // The micro sign and the Greek letter look alike; the parser knows the letter only. Line ends are mere space.
  const text = written.replaceAll('\u00b5', 'μ').replaceAll(/\s/gu, ' ')
  const tokens: Token[] = []
  const objections: Objection[] = []
  for (let offset = 0; offset < text.length; ) {
    TOKEN.lastIndex = offset
    const found = TOKEN.exec(text)
    if (found === null) {
      objections.push(foreign(text, offset))
      offset += String.fromCodePoint(text.codePointAt(offset)!).length
      continue
    }
    const { number, word, sign } = found.groups!
    if (number !== undefined) tokens.push({ kind: 'number', text: number, offset })
    if (word !== undefined) tokens.push({ kind: 'word', text: word, offset })
    if (sign !== undefined) tokens.push({ kind: 'sign', text: sign, offset })
    offset += found[0].length
  }
  objections.push(...tokens.flatMap((token, i) => wordObjections(token, tokens[i + 1])))
  objections.push(...sizeObjections(tokens))
  const inOrder = objections.sort((a, b) => a.offset - b.offset).slice(0, 5)
  if (inOrder.length > 0) return refused(inOrder as [Objection, ...Objection[]])
  if (tokens.length === 0)
    return refused([{ code: 'rule-empty', offset: 0, what: 'the expression is empty', remedy: 'write a condition' }])
  return { kind: 'scanned', text, tokens }
}

const refused = (objections: readonly [Objection, ...Objection[]]): Scan => ({ kind: 'refused', objections })

const foreign = (text: string, offset: number): Objection => {
  const character = String.fromCodePoint(text.codePointAt(offset)!)
  return {
    code: 'rule-not-admitted',
    offset,
    what: `${JSON.stringify(character)} is not part of the rule language`,
    remedy: INSTEAD.get(character) ?? 'use arithmetic, comparisons, and, or, not, ?: and the names of docs/rules.md',
  }
}

const wordObjections = ({ kind, text, offset }: Token, next: Token | undefined): readonly Objection[] => {
  if (kind !== 'word' || KEYWORDS.has(text)) return []
  const called = next?.text === '('
  if (called ? FUNCTIONS.has(text) : NAMES.has(text) || unitOf(text) !== undefined) return []
  if (called && (NAMES.has(text) || unitOf(text) !== undefined))
    return [
      {
        code: 'rule-unknown-function',
        offset,
        what: `${text} is no function`,
        remedy: `write a sign before the parenthesis, such as ${text} * (…)`,
      },
    ]
  if (FUNCTIONS.has(text))
    return [{ code: 'rule-syntax', offset, what: `${text} is a function`, remedy: `give it its argument: ${text}(…)` }]
  const meant = suggestion(text, called ? [...FUNCTIONS.keys()] : WORDS)
  return [
    {
      code: called ? 'rule-unknown-function' : 'rule-unknown-name',
      offset,
      what: `unknown ${called ? 'function' : 'name'} ${text}`,
      remedy: meant === null ? 'docs/rules.md lists the names and functions' : `did you mean ${meant}?`,
    },
  ]
}

const sizeObjections = (tokens: readonly Token[]): readonly Objection[] => {
  let depth = 0
  const tooDeep = tokens.find(({ text }) => {
    if (text === '(' || text === '?') depth++
    if (text === ')') depth--
    return depth > DEEPEST
  })
  const tooMany = tokens[MOST_TOKENS]
  const say = (token: Token, what: string): Objection => ({
    code: 'rule-too-long',
    offset: token.offset,
    what,
    remedy: 'split it into several rules',
  })
  return [
    ...(tooDeep ? [say(tooDeep, `the expression is nested more than ${DEEPEST} deep`)] : []),
    ...(tooMany ? [say(tooMany, `the expression has ${tokens.length} parts, at most ${MOST_TOKENS} are read`)] : []),
  ]
}
