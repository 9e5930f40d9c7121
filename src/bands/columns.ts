/** The columns of a fit: a component's curve times the weights, and its derivatives by its two search parameters (shapes.ts). */
import type { Triple } from './gram.ts'
import { FOUR_LN2, linesOf } from './shapes.ts'
import type { BandShape, RecipeComponent } from './types.ts'

/** Value, derivative by the first and by the second parameter. */
type Columns = Triple

/** Beyond this many widths a Gaussian is below 10⁻¹⁴ and left out. */
const REACH = 3.4

/** e^−k/64; Math.exp takes three times as long as a step through this table and five terms, good to 10⁻¹⁵. */
const STEP = 64
const POWERS = Float64Array.from({ length: Math.ceil(FOUR_LN2 * REACH * REACH + 1) * STEP }, (_, k) =>
  Math.exp(-k / STEP),
)

/** e^−t for 0 ≤ t ≤ 4 ln2 · 3.4². */
const falling = (t: number): number => {
  const k = Math.trunc(t * STEP)
  const r = k / STEP - t
  return POWERS[k]! * (1 + r * (1 + r * (1 / 2 + r * (1 / 6 + r * (1 / 24 + r / 120)))))
}

export const fillColumns = (
  { kind, shape }: RecipeComponent,
  first: number,
  second: number,
  edge: number,
  x: Float64Array,
  weight: Float64Array,
  columns: Columns,
): void => {
  if (kind === 'flank') fillFlank(first, second, edge, x, weight, columns)
  else fillBand(shape, first, second, x, weight, columns)
}

const fillBand = (
  shape: BandShape,
  position: number,
  width: number,
  x: Float64Array,
  weight: Float64Array,
  columns: Columns,
): void => {
  if (shape.kind === 'gaussian') fillGaussian(position, width, x, weight, columns)
  else if (shape.kind === 'log-normal') fillSkewed(shape.skew, position, width, x, weight, columns)
  else if (shape.kind === 'pseudo-voigt') fillPseudoVoigt(shape.lorentz, position, width, x, weight, columns)
  else fillProgression(shape, position, width, x, weight, columns)
}

const fillFlank = (
  first: number,
  second: number,
  edge: number,
  x: Float64Array,
  weight: Float64Array,
  [value, byFirst, bySecond]: Columns,
): void => {
  for (let i = 0; i < x.length; i++) {
    const t = x[i]! - edge
    const bent = t * (1 - (second * t) / 2)
    const f = Math.exp(first * bent) * weight[i]!
    value[i] = f
    byFirst[i] = bent * f
    bySecond[i] = (-first * t * t * f) / 2
  }
}

const fillGaussian = (
  position: number,
  width: number,
  x: Float64Array,
  weight: Float64Array,
  [value, byFirst, bySecond]: Columns,
): void => {
  const inverse = 1 / width
  const slope = 2 * FOUR_LN2 * inverse
  for (let i = 0; i < x.length; i++) {
    const u = (x[i]! - position) * inverse
    if (u > REACH || u < -REACH) {
      value[i] = 0
      byFirst[i] = 0
      bySecond[i] = 0
    } else {
      const f = falling(FOUR_LN2 * u * u) * weight[i]!
      const d = slope * u * f
      value[i] = f
      byFirst[i] = d
      bySecond[i] = d * u
    }
  }
}

const fillSkewed = (
  skew: number,
  position: number,
  width: number,
  x: Float64Array,
  weight: Float64Array,
  [value, byFirst, bySecond]: Columns,
): void => {
  for (let i = 0; i < x.length; i++) {
    const u = (x[i]! - position) / width
    const argument = 1 + 2 * skew * u
    value[i] = byFirst[i] = bySecond[i] = 0
    if (argument <= 0) continue
    const log = Math.log(argument) / skew
    const f = Math.exp(-Math.LN2 * log * log) * weight[i]!
    const d = (FOUR_LN2 * log * f) / (argument * width)
    value[i] = f
    byFirst[i] = d
    bySecond[i] = d * u
  }
}

const fillPseudoVoigt = (
  lorentz: number,
  position: number,
  width: number,
  x: Float64Array,
  weight: Float64Array,
  [value, byFirst, bySecond]: Columns,
): void => {
  for (let i = 0; i < x.length; i++) {
    const u = (x[i]! - position) / width
    const gauss = (1 - lorentz) * Math.exp(-FOUR_LN2 * u * u)
    const cauchy = 1 / (1 + 4 * u * u)
    const d = ((2 * FOUR_LN2 * gauss + 8 * lorentz * cauchy * cauchy) * u * weight[i]!) / width
    value[i] = (gauss + lorentz * cauchy) * weight[i]!
    byFirst[i] = d
    bySecond[i] = d * u
  }
}

const fillProgression = (
  shape: Extract<BandShape, { kind: 'progression' }>,
  position: number,
  width: number,
  x: Float64Array,
  weight: Float64Array,
  [value, byFirst, bySecond]: Columns,
): void => {
  const inverse = 1 / width
  const slope = 2 * FOUR_LN2 * inverse
  const lines = linesOf(shape)
  for (let i = 0; i < x.length; i++) {
    let f = 0
    let d = 0
    let e = 0
    for (const { shiftPerCm, share } of lines) {
      const u = (x[i]! - position - shiftPerCm) * inverse
      if (u > REACH || u < -REACH) continue
      const part = share * falling(FOUR_LN2 * u * u)
      f += part
      d += slope * u * part
      e += slope * u * u * part
    }
    value[i] = f * weight[i]!
    byFirst[i] = d * weight[i]!
    bySecond[i] = e * weight[i]!
  }
}
