import math from 'mathjs/lib/browser/math.js'
import { type Dimension, KELVIN_AT_ZERO_C, PLAIN, product, raised, unitOf } from './dimension.ts'
import { Refusal } from './parts.ts'
import { type Objection, scan, type Token } from './tokens.ts'

/** An admitted expression; `at` is the offset of the token that a fault in it is reported at. */
export type Tree = { readonly at: number } & (
  | { readonly kind: 'number'; readonly value: number }
  /** `celsius`: written in degC alone, a point on the scale and no difference. Value in base units. */
  | { readonly kind: 'quantity'; readonly value: number; readonly dimension: Dimension; readonly celsius: boolean }
  | { readonly kind: 'name'; readonly name: string }
  | { readonly kind: 'call'; readonly name: string; readonly parts: readonly Tree[] }
  | { readonly kind: 'negative' | 'not'; readonly of: Tree }
  | { readonly kind: Arithmetic; readonly left: Tree; readonly right: Tree }
  | { readonly kind: 'and' | 'or'; readonly left: Tree; readonly right: Tree }
  | { readonly kind: 'compare'; readonly signs: readonly Sign[]; readonly parts: readonly Tree[] }
  | { readonly kind: 'choose'; readonly test: Tree; readonly yes: Tree; readonly no: Tree }
)
export type Arithmetic = '+' | '-' | '*' | '/' | '^'
export type Sign = '==' | '!=' | '<' | '<=' | '>' | '>='

export type Reading =
  | { readonly kind: 'read'; readonly tree: Tree }
  | { readonly kind: 'refused'; readonly objections: readonly [Objection, ...Objection[]] }

/** What of a node of the parser is looked at. */
interface Node {
  readonly type: string
  readonly args?: readonly Node[]
  readonly params?: readonly Node[]
  readonly conditionals?: readonly string[]
  readonly content?: Node
  readonly condition?: Node
  readonly trueExpr?: Node
  readonly falseExpr?: Node
  readonly fn?: { readonly name?: string } | string
  readonly op?: string
  readonly name?: string
  readonly value?: unknown
  readonly implicit?: boolean
}

/** A unit waits in the tree until the number that it belongs to takes it up. */
type Growing = Tree | UnitPart
type UnitPart = {
  readonly kind: 'unit'
  readonly at: number
  readonly unit: string
  readonly dimension: Dimension
  readonly size: number
}

const COMPARISONS: ReadonlyMap<string, Sign> = new Map([
  ['equal', '=='],
  ['unequal', '!='],
  ['smaller', '<'],
  ['smallerEq', '<='],
  ['larger', '>'],
  ['largerEq', '>='],
])
const ARITHMETIC: ReadonlyMap<string, Arithmetic> = new Map([
  ['add', '+'],
  ['subtract', '-'],
  ['multiply', '*'],
  ['divide', '/'],
  ['pow', '^'],
])

/** Reads an expression into a tree of admitted nodes, or says what is not admitted and where. Never throws, runs nothing. */
export const readTree = (written: string): Reading => {
  const scanned = scan(written)
  if (scanned.kind === 'refused') return scanned
  try {
    const node = math.parse(scanned.text) as unknown as Node
    return { kind: 'read', tree: finished(growing(scanned.tokens)(node)) }
  } catch (error) {
    return { kind: 'refused', objections: [error instanceof Refusal ? error.objection : syntax(error, scanned.text)] }
  }
}

const syntax = (error: unknown, text: string): Objection => {
  const { char, message } = error as { char?: number; message?: string }
  const offset = Math.min(typeof char === 'number' ? char - 1 : 0, text.length)
  const what = (message ?? 'it cannot be read').replace(/ \(char \d+\)$/, '')
  return {
    code: 'rule-syntax',
    offset,
    what: `the expression cannot be read: ${what}`,
    remedy: 'mend it at this place',
  }
}

/**
 * The parser hands out its leaves in the order of the text, so a cursor over the tokens tells where each stands; a leaf
 * that is not the token expected there is refused.
 */
const growing = (tokens: readonly Token[]) => {
  let next = 0
  const leaf = (kind: Token['kind'], agrees: (token: Token) => boolean): Token => {
    while (tokens[next]?.kind === 'sign' || isKeyword(tokens[next])) next++
    const token = tokens[next++]
    if (token === undefined || token.kind !== kind || !agrees(token))
      throw new Refusal('rule-not-admitted', token?.offset ?? 0, 'this part is not admitted', 'see docs/rules.md')
    return token
  }
  /** Offset of the first of these signs from a token on; parentheses that close the left side are passed over. */
  const signAt = (from: number, text: string): number =>
    tokens.slice(from).find((token) => token.text === text)?.offset ?? tokens[from]?.offset ?? 0

  const grow = (node: Node): Growing => {
    switch (node.type) {
      case 'ConstantNode': {
        const { offset } = leaf('number', ({ text }) => Number(text) === node.value)
        if (!Number.isFinite(node.value))
          throw new Refusal('rule-not-admitted', offset, 'the number is too large', 'write a number below 1e308')
        return { kind: 'number', at: offset, value: node.value as number }
      }
      case 'SymbolNode': {
        const { offset, text } = leaf('word', (token) => token.text === node.name)
        const unit = unitOf(text)
        return unit ? { kind: 'unit', at: offset, unit: text, ...unit } : { kind: 'name', at: offset, name: text }
      }
      case 'FunctionNode': {
        const name = typeof node.fn === 'string' ? node.fn : node.fn?.name
        const { offset, text } = leaf('word', (token) => token.text === name)
        return { kind: 'call', at: offset, name: text, parts: node.args!.map((part) => finished(grow(part))) }
      }
      case 'ParenthesisNode':
        return grow(node.content!)
      case 'ConditionalNode': {
        const test = finished(grow(node.condition!))
        const at = signAt(next, '?')
        const yes = finished(grow(node.trueExpr!))
        return { kind: 'choose', at, test, yes, no: finished(grow(node.falseExpr!)) }
      }
      case 'RelationalNode': {
        const parts = [finished(grow(node.params![0]!))]
        const signs = node.conditionals!.map((name) => COMPARISONS.get(name)!)
        const at = signAt(next, signs[0]!)
        parts.push(...node.params!.slice(1).map((part) => finished(grow(part))))
        return { kind: 'compare', at, signs, parts }
      }
      case 'OperatorNode':
        return operator(node)
      default:
        throw new Refusal(
          'rule-not-admitted',
          tokens[next]?.offset ?? 0,
          `${NODES.get(node.type) ?? 'this part'} is not part of the rule language`,
          'use arithmetic, comparisons, and, or, not, ?: and the names of docs/rules.md',
        )
    }
  }

  const operator = (node: Node): Growing => {
    const fn = node.fn as string
    const args = node.args!
    if (args.length === 1 && (fn === 'unaryMinus' || fn === 'not')) {
      const at = signAt(next, fn === 'not' ? 'not' : '-')
      const of = finished(grow(args[0]!))
      if (fn === 'not') return { kind: 'not', at, of }
      return of.kind === 'number' ? { ...of, value: -of.value } : { kind: 'negative', at, of }
    }
    const comparison = COMPARISONS.get(fn)
    const arithmetic = ARITHMETIC.get(fn)
    if (args.length !== 2 || !(comparison || arithmetic || fn === 'and' || fn === 'or'))
      throw new Refusal(
        'rule-not-admitted',
        signAt(next, node.op ?? ''),
        `the operator ${node.op} is not part of the rule language`,
        'use + - * / ^, comparisons, and, or, not',
      )
    const left = grow(args[0]!)
    const at = node.implicit ? (tokens[next]?.offset ?? 0) : signAt(next, node.op!)
    const right = grow(args[1]!)
    if (arithmetic) return joined(arithmetic, left, right, at, node.implicit === true)
    const sides = { left: finished(left), right: finished(right) }
    if (comparison) return { kind: 'compare', at, signs: [comparison], parts: [sides.left, sides.right] }
    return { kind: fn as 'and' | 'or', at, ...sides }
  }
  return grow
}

const isKeyword = (token: Token | undefined) => token?.kind === 'word' && /^(and|or|not)$/.test(token.text)

const NODES: ReadonlyMap<string, string> = new Map([
  ['RangeNode', 'a range'],
  ['BlockNode', 'a sequence of expressions'],
])

/** Arithmetic, with units taken up by the number before them: `60 cm^-1`, `3 mol/L`, `2 cm^-1 h^-1`. */
const joined = (sign: Arithmetic, left: Growing, right: Growing, at: number, implicit: boolean): Growing => {
  if (left.kind === 'unit') {
    const power = right.kind === 'number' ? right.value : Number.NaN
    if (sign === '^' && Number.isInteger(power))
      return {
        ...left,
        unit: `${left.unit}^${power}`,
        dimension: raised(left.dimension, power),
        size: left.size ** power,
      }
    throw strayUnit(left)
  }
  if (right.kind === 'unit') {
    const power = sign === '/' ? -1 : 1
    const taken = implicit || sign === '/' ? withUnit(left, right, power, implicit) : null
    if (taken === null) throw strayUnit(right)
    return taken
  }
  if (implicit && left.kind !== 'number')
    throw new Refusal(
      'rule-syntax',
      right.at,
      'a sign is missing before this part',
      'write the * or the operator meant',
    )
  return { kind: sign, at, left, right }
}

/** The number or quantity that a unit follows, with the unit; null where none does. */
const withUnit = (tree: Tree, unit: UnitPart, power: 1 | -1, implicit: boolean): Tree | null => {
  if (tree.kind === 'number' && implicit)
    return {
      kind: 'quantity',
      at: tree.at,
      value: unit.unit === 'degC' ? tree.value + KELVIN_AT_ZERO_C : tidy(tree.value * unit.size),
      dimension: product(PLAIN, unit.dimension),
      celsius: unit.unit === 'degC',
    }
  if (tree.kind === 'quantity') {
    // `2 degC/h` is a rate: the degree is a difference there.
    const value = tree.celsius ? tree.value - KELVIN_AT_ZERO_C : tree.value
    return {
      ...tree,
      value: tidy(value * unit.size ** power),
      dimension: product(tree.dimension, unit.dimension, power),
      celsius: false,
    }
  }
  // `2 * 3 mol/L`: the parser divides last, the unit still belongs to the 3.
  if (tree.kind === '*' && !implicit && tree.right.kind === 'quantity') {
    const right = withUnit(tree.right, unit, power, implicit)
    return right && { ...tree, right }
  }
  return null
}

/** Takes back the rounding of a change of unit: 1000 nm are 1 um. */
const tidy = (x: number): number => Number(x.toPrecision(15))

const strayUnit = ({ at, unit }: UnitPart) =>
  new Refusal(
    'rule-unit',
    at,
    `the unit ${unit} does not follow a number`,
    `write a number before it, such as 1 ${unit}, in parentheses after a division`,
  )

const finished = (part: Growing): Tree => {
  if (part.kind === 'unit') throw strayUnit(part)
  return part
}
