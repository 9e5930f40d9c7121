import { isPlain, PLAIN, product, raised, sameDimension, sayDimension, TEMPERATURE } from './dimension.ts'
import {
  and,
  type Frame,
  GATHERING,
  MISSING,
  missing,
  NO,
  type NumberOf,
  not,
  or,
  type Truth,
  type TruthOf,
  YES,
} from './frame.ts'
import { call, oneSeries } from './functions.ts'
import {
  common,
  constant,
  differenceScale,
  type Notes,
  type NumberPart,
  number,
  type Part,
  pointRefusal,
  Refusal,
  reach,
  scaleOf,
  sumScale,
  type TruthPart,
  unitRefusal,
} from './parts.ts'
import type { Objection } from './tokens.ts'
import type { Arithmetic, Sign, Tree } from './tree.ts'
import * as windows from './windows.ts'

/**
 * Second gate of the rule language: dimensions are checked over the tree, and the tree becomes closures on plain
 * numbers in base units. What is refused here is refused when the configuration is read.
 */
export interface Compiled {
  readonly run: TruthOf
  /** In the order in which they are named. */
  readonly series: readonly windows.Series[]
  /** Occasions of history needed at the most. */
  readonly lookBack: number
}
export type Compiling =
  | { readonly kind: 'compiled'; readonly compiled: Compiled }
  | { readonly kind: 'refused'; readonly objection: Objection }

/** Compiles a condition. Pure; the closure that results never throws and allocates next to nothing. */
export const compileCondition = (tree: Tree): Compiling => {
  const notes = freshNotes()
  try {
    const part = partOf(tree, notes)
    if (part.type === 'number')
      throw new Refusal(
        'rule-not-a-condition',
        tree.at,
        `the expression is a number (${sayDimension(part.dimension)}), not a condition`,
        'compare it with something, such as … > 60 cm^-1',
      )
    return {
      kind: 'compiled',
      compiled: { run: part.run, series: [...notes.series.values()], lookBack: notes.lookBack },
    }
  } catch (error) {
    if (error instanceof Refusal) return { kind: 'refused', objection: error.objection }
    throw error
  }
}

/** The one name or `absorbance(…)` that a chart is drawn of, or why it is none. */
export const seriesOf = (tree: Tree): windows.Series | Objection => {
  const notes = freshNotes()
  try {
    return oneSeries(tree, notes, 'a chart')
  } catch (error) {
    if (error instanceof Refusal) return error.objection
    throw error
  }
}

const freshNotes = (): Notes => {
  const notes: Notes = { series: new Map(), lookBack: 1, operand: (tree, who) => numberPart(tree, notes, who) }
  return notes
}

const partOf = (tree: Tree, notes: Notes): Part => {
  switch (tree.kind) {
    case 'number':
      return constant(tree.value, PLAIN, 'difference')
    case 'quantity': {
      const temperature = sameDimension(tree.dimension, TEMPERATURE)
      return constant(tree.value, tree.dimension, temperature ? (tree.celsius ? 'point' : 'either') : 'difference')
    }
    case 'name': {
      const series = oneSeries(tree, notes, tree.name)
      if (series.name === 'gap') reach(notes, 2)
      return number(series.dimension, scaleOf(series), windows.current(series))
    }
    case 'call':
      return call(tree, notes)
    case 'negative': {
      const of = numberPart(tree.of, notes, 'the minus')
      if (of.scale === 'point') throw pointRefusal(tree.at, 'negated')
      const { run } = of
      return { ...of, run: (frame) => -run(frame) }
    }
    case 'not': {
      const { run } = truthPart(tree.of, notes, 'not')
      return { type: 'truth', run: (frame) => not(run(frame)) }
    }
    case 'and':
    case 'or': {
      const left = truthPart(tree.left, notes, tree.kind).run
      const right = truthPart(tree.right, notes, tree.kind).run
      return tree.kind === 'and'
        ? { type: 'truth', run: (frame) => and(left(frame), right(frame)) }
        : { type: 'truth', run: (frame) => or(left(frame), right(frame)) }
    }
    case 'compare':
      return comparison(tree, notes)
    case 'choose':
      return choice(tree, notes)
    default:
      return arithmetic(tree, notes)
  }
}

const numberPart = (tree: Tree, notes: Notes, who: string): NumberPart => {
  const part = partOf(tree, notes)
  if (part.type === 'number') return part
  throw new Refusal(
    'rule-type',
    tree.at,
    `${who} needs a number, this is a condition`,
    'use and, or, not with conditions',
  )
}

const truthPart = (tree: Tree, notes: Notes, who: string): TruthPart => {
  const part = partOf(tree, notes)
  if (part.type === 'truth') return part
  const remedy = who === 'not' ? 'put the comparison in parentheses: not (a > b)' : 'write a comparison'
  throw new Refusal('rule-type', tree.at, `${who} needs a condition, this is a number`, remedy)
}

const SIGNS: Readonly<Record<Sign, (a: number, b: number) => boolean>> = {
  '==': (a, b) => a === b,
  '!=': (a, b) => a !== b,
  '<': (a, b) => a < b,
  '<=': (a, b) => a <= b,
  '>': (a, b) => a > b,
  '>=': (a, b) => a >= b,
}

const comparison = (tree: Tree & { kind: 'compare' }, notes: Notes): TruthPart => {
  const parts = tree.parts.map((part) => numberPart(part, notes, 'a comparison'))
  const links = tree.signs.map((sign, i) => {
    common(parts[i]!, parts[i + 1]!, tree.at)
    return compared(parts[i]!.run, parts[i + 1]!.run, SIGNS[sign])
  })
  const run = links.reduce((before, link) => (frame) => and(before(frame), link(frame)))
  return { type: 'truth', run }
}

/** Undecided when either side has no number, for the strongest reason that was noted on the way. */
const compared =
  (left: NumberOf, right: NumberOf, holds: (a: number, b: number) => boolean): TruthOf =>
  (frame) => {
    const before = frame.noted
    frame.noted = NO
    const a = left(frame)
    const b = right(frame)
    const truth = Number.isFinite(a) && Number.isFinite(b) ? (holds(a, b) ? YES : NO) : reason(frame)
    frame.noted = before
    return truth
  }

/** A root of a negative number, a division by zero: nothing was noted, yet there is no number. */
const reason = (frame: Frame): Truth => {
  if (frame.noted === NO) missing(frame, 'a division by zero, or a root or logarithm outside its range')
  return frame.noted === GATHERING ? GATHERING : MISSING
}

const choice = (tree: Tree & { kind: 'choose' }, notes: Notes): Part => {
  const test = truthPart(tree.test, notes, 'the condition before ?').run
  const yes = partOf(tree.yes, notes)
  const no = partOf(tree.no, notes)
  if (yes.type === 'truth' && no.type === 'truth')
    return {
      type: 'truth',
      run: (frame) => {
        const truth = test(frame)
        return truth === YES ? yes.run(frame) : truth === NO ? no.run(frame) : truth
      },
    }
  if (yes.type === 'number' && no.type === 'number') {
    const run: NumberOf = (frame) => {
      const truth = test(frame)
      if (truth === YES) return yes.run(frame)
      if (truth === NO) return no.run(frame)
      if (truth > frame.noted) frame.noted = truth as typeof GATHERING | typeof MISSING
      return Number.NaN
    }
    return number(yes.dimension, common(yes, no, tree.at), run)
  }
  throw new Refusal(
    'rule-type',
    tree.at,
    'one branch is a number and the other a condition',
    'make both numbers or both conditions',
  )
}

const arithmetic = (tree: Tree & { kind: Arithmetic }, notes: Notes): NumberPart => {
  const left = numberPart(tree.left, notes, tree.kind)
  const right = numberPart(tree.right, notes, tree.kind)
  const a = left.run
  const b = right.run
  switch (tree.kind) {
    case '+':
      return number(left.dimension, sumScale(left, right, tree.at), (frame) => a(frame) + b(frame))
    case '-':
      return number(left.dimension, differenceScale(left, right, tree.at), (frame) => a(frame) - b(frame))
    case '*':
      return number(product(left.dimension, right.dimension), 'difference', (frame) => a(frame) * b(frame))
    case '/':
      return number(product(left.dimension, right.dimension, -1), 'difference', (frame) => a(frame) / b(frame))
    case '^':
      return power(tree.right, left, right)
  }
}

const power = (written: Tree, base: NumberPart, exponent: NumberPart): NumberPart => {
  if (!isPlain(exponent.dimension))
    throw unitRefusal(written.at, 'an exponent is a plain number', 'divide by a quantity of the same unit')
  const a = base.run
  const b = exponent.run
  // NaN to the power 0 is 1 in JavaScript; here what could not be had stays so.
  const run: NumberOf = (frame) => {
    const x = a(frame)
    return Number.isNaN(x) ? x : x ** b(frame)
  }
  if (isPlain(base.dimension)) return number(PLAIN, 'difference', run)
  if (written.kind !== 'number')
    throw unitRefusal(
      written.at,
      'a quantity with a unit takes a number as its exponent',
      'write the exponent as a number',
    )
  return number(raised(base.dimension, written.value), 'difference', run)
}
