/**
 * The functions of a recipe and the nonlinear parameters the search runs over, two a component.
 *
 * band  φ(x) = exp(−4 ln2 u²), u = (x − p)/w; parameters p (centre) and w (full width at half maximum), cm⁻¹
 *       skewed: φ(x) = exp(−ln2 (ln(1 + 2 b u)/b)²), 0 where 1 + 2 b u ≤ 0, with the asymmetry b held (Fraser & Suzuki, Anal. Chem. 41
 *       (1969) 37, from memory); maximum at p, full width at half maximum w sinh(b)/b; b → 0 is the Gaussian
 * flank φ(x) = exp(b (t − e t²/2)), t = x − xₑ with xₑ the upper end of the window: a Gaussian about p = xₑ + 1/e of
 *       width w = √(8 ln2 / (b e)), normalised at xₑ; b is the logarithmic slope there. Of a tail the data tell value and
 *       slope at xₑ well, the centre hardly at all: in (b, e) the ridge is straight, in (p, w) a search crawls along a parabola.
 */

import type { Box } from './levenbergMarquardt.ts'
import type { Recipe, RecipeComponent } from './types.ts'

/** 4 ln 2 */
export const FOUR_LN2 = 4 * Math.LN2
/** Beyond this many widths a Gaussian is below 10⁻¹⁴ and left out. */
const REACH = 3.4

/** Start and box of the search. A flank's centre must lie beyond the window; its widths bound the slope b. */
export const searchSpace = (recipe: Recipe): { readonly start: Float64Array; readonly box: Box } => {
  const edge = recipe.windowPerCm[1]
  const rows = recipe.components.flatMap((component) => parameterRows(component, edge))
  return {
    start: Float64Array.from(rows, (row) => row[0]),
    box: { lower: Float64Array.from(rows, (row) => row[1]), upper: Float64Array.from(rows, (row) => row[2]) },
  }
}

type Row = readonly [start: number, lower: number, upper: number]

const parameterRows = (component: RecipeComponent, edge: number): readonly [Row, Row] => {
  const { positionPerCm: p, widthPerCm: w, positionBoundsPerCm: pb, widthBoundsPerCm: wb } = component
  if (component.kind === 'band')
    return [
      [p, pb[0], pb[1]],
      [w, wb[0], wb[1]],
    ]
  const slope = (position: number, width: number) => (2 * FOUR_LN2 * (position - edge)) / width ** 2
  return [
    [slope(p, w), slope(pb[0], wb[1]), slope(pb[1], wb[0])],
    [1 / (p - edge), 1 / (pb[1] - edge), 1 / (pb[0] - edge)],
  ]
}

/** Fills φ·weight and its two derivatives along one component. */
export const fillColumns = (
  kind: RecipeComponent['kind'],
  first: number,
  second: number,
  edge: number,
  x: Float64Array,
  weight: Float64Array,
  value: Float64Array,
  byFirst: Float64Array,
  bySecond: Float64Array,
): void => {
  const n = x.length
  if (kind === 'flank') {
    for (let i = 0; i < n; i++) {
      const t = x[i]! - edge
      const bent = t * (1 - (second * t) / 2)
      const f = Math.exp(first * bent) * weight[i]!
      value[i] = f
      byFirst[i] = bent * f
      bySecond[i] = (-first * t * t * f) / 2
    }
    return
  }
  const inverse = 1 / second
  const slope = 2 * FOUR_LN2 * inverse
  for (let i = 0; i < n; i++) {
    const u = (x[i]! - first) * inverse
    if (u > REACH || u < -REACH) {
      value[i] = 0
      byFirst[i] = 0
      bySecond[i] = 0
    } else {
      const f = Math.exp(-FOUR_LN2 * u * u) * weight[i]!
      const d = slope * u * f
      value[i] = f
      byFirst[i] = d
      bySecond[i] = d * u
    }
  }
}

/** The same for a band of asymmetry `skew`, not 0. */
export const fillSkewed = (
  skew: number,
  position: number,
  width: number,
  x: Float64Array,
  weight: Float64Array,
  value: Float64Array,
  byPosition: Float64Array,
  byWidth: Float64Array,
): void => {
  for (let i = 0; i < x.length; i++) {
    const u = (x[i]! - position) / width
    const argument = 1 + 2 * skew * u
    value[i] = byPosition[i] = byWidth[i] = 0
    if (argument <= 0) continue
    const log = Math.log(argument) / skew
    const f = Math.exp(-Math.LN2 * log * log) * weight[i]!
    const d = (FOUR_LN2 * log * f) / (argument * width)
    value[i] = f
    byPosition[i] = d
    byWidth[i] = d * u
  }
}

/** Full width at half maximum of a component over its parameter w. */
export const widthRatio = ({ skew }: RecipeComponent): number => (skew ? Math.sinh(skew) / skew : 1)

/** Height of a band of asymmetry `skew` at u = (x − p)/w, 1 at its centre. */
export const bandAt = (skew: number, u: number): number => {
  if (skew === 0) return Math.exp(-FOUR_LN2 * u * u)
  const argument = 1 + 2 * skew * u
  return argument > 0 ? Math.exp(-Math.LN2 * (Math.log(argument) / skew) ** 2) : 0
}

/** The middle of the window, at which scatter is given. */
export const scatterOrigin = (recipe: Recipe): number => (recipe.windowPerCm[0] + recipe.windowPerCm[1]) / 2

/** Background term at wavenumber x: 1, or (x/x₀)ⁿ. */
export const backgroundAt = (exponent: number, origin: number, x: number): number =>
  exponent === 0 ? 1 : exponent === 4 ? ((x / origin) ** 2) ** 2 : (x / origin) ** exponent

export const backgroundExponents = (recipe: Recipe): readonly number[] =>
  recipe.background.map((term) => (term.kind === 'constant' ? 0 : term.exponent))

/** Centre, full width at half maximum, and height at the centre over the coefficient, of a component with these search parameters. */
export const componentAt = (kind: RecipeComponent['kind'], first: number, second: number, edge: number) =>
  kind === 'band'
    ? { positionPerCm: first, widthPerCm: second, heightRatio: 1 }
    : {
        positionPerCm: edge + 1 / second,
        widthPerCm: Math.sqrt((2 * FOUR_LN2) / (first * second)),
        heightRatio: Math.exp(first / (2 * second)),
      }
