/**
 * The functions of a recipe and the parameters that the search runs over, two a component. What else shapes a band (asymmetry,
 * Lorentzian share, vibrational quantum) is part of the recipe and held.
 *
 * gaussian     φ(x) = exp(−4 ln2 u²), u = (x − p)/w; parameters p (centre) and w (full width at half maximum), cm⁻¹
 * log-normal   φ(x) = exp(−ln2 (ln(1 + 2 b u)/b)²), 0 where 1 + 2 b u ≤ 0, with the asymmetry b held (Fraser & Suzuki, Anal. Chem. 41
 *              (1969) 37, from memory); maximum at p, full width at half maximum w sinh(b)/b; b → 0 is the Gaussian
 * pseudo-voigt φ(x) = (1 − η) exp(−4 ln2 u²) + η/(1 + 4 u²), η the Lorentzian share; both parts have the width w (Wertheim,
 *              Butler, West & Buchanan, Rev. Sci. Instrum. 45 (1974) 1369, from memory)
 * progression  φ(x) = Σₖ e^−S Sᵏ/k! exp(−4 ln2 ((x − p − (k − S) q)/w)²): the lines of one displaced vibration of quantum q
 *              under Franck and Condon, S the Huang–Rhys factor (Poisson); p is the centre of gravity, where the vertical transition is
 * flank        φ(x) = exp(b (t − e t²/2)), t = x − xₑ with xₑ the upper end of the window: a Gaussian about p = xₑ + 1/e of
 *              width w = √(8 ln2 / (b e)), normalised at xₑ; b is the logarithmic slope there. Of a tail the data tell value and
 *              slope at xₑ well, the centre hardly at all: in (b, e) the ridge is straight, in (p, w) a search crawls along a parabola.
 */

import type { Box } from './levenbergMarquardt.ts'
import type { BackgroundTerm, BandShape, FittedComponent, Recipe, RecipeComponent } from './types.ts'

/** 4 ln 2 */
export const FOUR_LN2 = 4 * Math.LN2

/** Start and box of the search. A flank's centre must lie beyond the window; its widths bound the slope b. */
export const searchSpace = (recipe: Recipe): { readonly start: Float64Array; readonly box: Box } => {
  const edge = recipe.windowPerCm[1]
  const count = 2 * recipe.components.length
  const [start, lower, upper] = [new Float64Array(count), new Float64Array(count), new Float64Array(count)]
  recipe.components.forEach((component, k) => {
    parameterRows(component, edge).forEach((row, i) => {
      start[2 * k + i] = row[0]
      lower[2 * k + i] = row[1]
      upper[2 * k + i] = row[2]
    })
  })
  return { start, box: { lower, upper } }
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

export const GAUSSIAN: BandShape = { kind: 'gaussian' }

/** Lines of a progression: distance from the centre of gravity, and share of the whole. Lines below 10⁻⁶ are left out. */
export const linesOf = ({
  quantumPerCm,
  huangRhys,
}: Extract<BandShape, { kind: 'progression' }>): readonly { readonly shiftPerCm: number; readonly share: number }[] => {
  const lines: { readonly shiftPerCm: number; readonly share: number }[] = []
  let share = Math.exp(-huangRhys)
  for (let k = 0; k < huangRhys || share > 1e-6; k++) {
    if (share > 1e-6) lines.push({ shiftPerCm: (k - huangRhys) * quantumPerCm, share })
    share *= huangRhys / (k + 1)
  }
  return lines
}

/** φ of a band at x, before its coefficient. */
export const bandAt = (shape: BandShape, positionPerCm: number, widthPerCm: number, x: number): number => {
  const u = (x - positionPerCm) / widthPerCm
  switch (shape.kind) {
    case 'gaussian':
      return Math.exp(-FOUR_LN2 * u * u)
    case 'log-normal': {
      const argument = 1 + 2 * shape.skew * u
      return argument > 0 ? Math.exp(-Math.LN2 * (Math.log(argument) / shape.skew) ** 2) : 0
    }
    case 'pseudo-voigt':
      return (1 - shape.lorentz) * Math.exp(-FOUR_LN2 * u * u) + shape.lorentz / (1 + 4 * u * u)
    case 'progression':
      return linesOf(shape).reduce(
        (sum, { shiftPerCm, share }) => sum + share * Math.exp(-FOUR_LN2 * (u - shiftPerCm / widthPerCm) ** 2),
        0,
      )
  }
}

/** Absorbance of a fitted component at x. */
export const curveOf = ({ shape, positionPerCm, widthPerCm, height }: CurveOf): ((x: number) => number) => {
  const width = lineWidth(shape, widthPerCm)
  const { heightRatio } = figuresOf({ kind: 'band', shape }, positionPerCm, width, 0)
  return (x) => (height / heightRatio) * bandAt(shape, positionPerCm, width, x)
}

type CurveOf = Pick<FittedComponent, 'shape' | 'positionPerCm' | 'widthPerCm' | 'height'>

/** The width w in a shape's formula, of a band with this full width at half maximum. */
const lineWidth = (shape: BandShape, fullPerCm: number): number => {
  if (shape.kind === 'log-normal') return (fullPerCm * shape.skew) / Math.sinh(shape.skew)
  if (shape.kind !== 'progression') return fullPerCm
  let low = fullPerCm / 50
  let high = fullPerCm
  for (let round = 0; round < 30; round++) {
    const middle = (low + high) / 2
    if (envelope(shape, middle).widthPerCm < fullPerCm) low = middle
    else high = middle
  }
  return (low + high) / 2
}

/** The middle of the window, at which scatter is given. */
export const scatterOrigin = ({ windowPerCm: [from, to] }: Pick<Recipe, 'windowPerCm'>): number => (from + to) / 2

/** Background term at wavenumber x: 1, (x/x₀)ⁿ, or 0 below and 1 above its place. */
export const backgroundAt = (term: BackgroundTerm, origin: number, x: number): number => {
  switch (term.kind) {
    case 'constant':
      return 1
    case 'scatter':
      return term.exponent === 4 ? ((x / origin) ** 2) ** 2 : (x / origin) ** term.exponent
    case 'step':
      return x > term.atPerCm ? 1 : 0
  }
}

export interface ComponentFigures {
  readonly positionPerCm: number
  /** Full width at half maximum of the whole component, and what a change of the search's width does to it. */
  readonly widthPerCm: number
  readonly widthSlope: number
  /** Highest value of the component over its coefficient. */
  readonly heightRatio: number
}

/** Centre, full width at half maximum and height of a component with these search parameters. */
export const figuresOf = (
  { kind, shape }: Pick<RecipeComponent, 'kind' | 'shape'>,
  first: number,
  second: number,
  edge: number,
): ComponentFigures => {
  if (kind === 'flank')
    return {
      positionPerCm: edge + 1 / second,
      widthPerCm: Math.sqrt((2 * FOUR_LN2) / (first * second)),
      widthSlope: 0,
      heightRatio: Math.exp(first / (2 * second)),
    }
  if (shape.kind === 'progression') {
    const { widthPerCm, height } = envelope(shape, second)
    const widthSlope = (envelope(shape, second * 1.01).widthPerCm - widthPerCm) / (0.01 * second)
    return { positionPerCm: first, widthPerCm, widthSlope, heightRatio: height }
  }
  const ratio = shape.kind === 'log-normal' ? Math.sinh(shape.skew) / shape.skew : 1
  return { positionPerCm: first, widthPerCm: second * ratio, widthSlope: ratio, heightRatio: 1 }
}

/** Height of a progression's highest point, and the distance between the outermost points of half of it. */
const envelope = (shape: Extract<BandShape, { kind: 'progression' }>, widthPerCm: number) => {
  const reach = 3 * Math.sqrt(shape.huangRhys) * shape.quantumPerCm + 2 * widthPerCm
  const step = widthPerCm / 200
  const curve = Array.from({ length: 2 * Math.ceil(reach / step) + 1 }, (_, i) =>
    bandAt(shape, 0, widthPerCm, i * step - reach),
  )
  const height = curve.reduce((highest, value) => Math.max(highest, value), 0)
  const first = curve.findIndex((value) => value >= height / 2)
  const last = curve.findLastIndex((value) => value >= height / 2)
  return { height, widthPerCm: (last - first) * step }
}
