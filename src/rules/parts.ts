import { type Dimension, sameDimension, sayDimension } from './dimension.ts'
import type { NumberOf, TruthOf } from './frame.ts'
import type { Objection } from './tokens.ts'
import type { Tree } from './tree.ts'
import type * as windows from './windows.ts'

/**
 * Temperatures are points on a scale or differences. `temperature` and `25 degC` are points; the difference of two
 * points and `sd(temperature, 5)` are differences; a number in K may stand for either.
 */
export type Scale = 'point' | 'difference' | 'either'

export interface NumberPart {
  readonly type: 'number'
  readonly dimension: Dimension
  readonly scale: Scale
  readonly run: NumberOf
}
export interface TruthPart {
  readonly type: 'truth'
  readonly run: TruthOf
}
export type Part = NumberPart | TruthPart

/** Carries one objection out of the depth of an expression; never leaves the room. */
export class Refusal extends Error {
  readonly objection: Objection
  constructor(code: string, offset: number, what: string, remedy: string) {
    super(what)
    this.objection = { code, offset, what, remedy }
  }
}

/** What is learnt of an expression while it is compiled. */
export interface Notes {
  readonly series: Map<string, windows.Series>
  lookBack: number
  /** Compiles an argument that must be a number; `who` asks for it. */
  readonly operand: (tree: Tree, who: string) => NumberPart
}

export const number = (dimension: Dimension, scale: Scale, run: NumberOf): NumberPart => ({
  type: 'number',
  dimension,
  scale,
  run,
})
export const constant = (value: number, dimension: Dimension, scale: Scale) => number(dimension, scale, () => value)
export const scaleOf = ({ name }: windows.Series): Scale => (name === 'temperature' ? 'point' : 'difference')

export const reach = (notes: Notes, occasions: number) => {
  notes.lookBack = Math.max(notes.lookBack, occasions)
}

export const unitRefusal = (at: number, what: string, remedy: string) => new Refusal('rule-unit', at, what, remedy)
export const pointRefusal = (at: number, done: string) =>
  unitRefusal(at, `a temperature on the Celsius scale cannot be ${done}`, 'write temperatures and differences in K')

/** The scale of two numbers that stand side by side (compared, chosen between), or a refusal. */
export const common = (a: NumberPart, b: NumberPart, at: number): Scale => {
  if (!sameDimension(a.dimension, b.dimension))
    throw unitRefusal(
      at,
      `units do not fit: ${sayDimension(a.dimension)} against ${sayDimension(b.dimension)}`,
      'give both sides the same kind of unit',
    )
  if (a.scale === 'either') return b.scale
  if (b.scale === 'either' || a.scale === b.scale) return a.scale
  throw unitRefusal(
    at,
    'a difference of temperatures stands against a temperature',
    'write a difference in K, such as 2 K',
  )
}

export const sumScale = (a: NumberPart, b: NumberPart, at: number): Scale => {
  if (a.scale === 'point' && b.scale === 'point') throw pointRefusal(at, 'added to another')
  if (a.scale === 'point' || b.scale === 'point') {
    common({ ...a, scale: 'either' }, b, at)
    return 'point'
  }
  return common(a, b, at)
}

export const differenceScale = (a: NumberPart, b: NumberPart, at: number): Scale => {
  common({ ...a, scale: 'either' }, b, at)
  if (b.scale !== 'point') return a.scale
  if (a.scale === 'difference') throw pointRefusal(at, 'taken from a difference')
  return 'difference'
}
