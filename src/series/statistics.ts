/**
 * Statistics of a few numbers in time, with standard uncertainties (GUM, k = 1).
 *
 * Wherever an uncertainty can be had in two ways, from the uncertainties of the values (predicted) and from their
 * scatter (observed), the larger counts, never their sum: the scatter already holds the repeatability.
 *
 * Straight line by weighted least squares, w = 1/u² (w = 1 where a u is unknown), times about their weighted mean t̄:
 * slope = Σw(t−t̄)y / Σw(t−t̄)²; predicted u² = 1/Σw(t−t̄)²; observed u² = predicted u² · Σw r² / (n−2).
 */

/** A value at a time with what is known of its uncertainty. */
export interface Point {
  readonly at: number
  readonly value: number
  readonly u: number | null
}

export interface Line {
  /** Units of the value per unit of time of the points. */
  readonly slope: number
  /** Larger of predicted and observed; null with two points and no uncertainties. */
  readonly uSlope: number | null
  /** From the uncertainties of the points; null where one is unknown. */
  readonly predictedUSlope: number | null
  /** From the scatter about the line; null with two points. */
  readonly observedUSlope: number | null
  /** Value of the line at the weighted mean time. */
  readonly middle: number
  readonly middleAt: number
}

/** Arithmetic mean; the list is not empty. */
export const mean = (values: readonly number[]): number => {
  const rough = values.reduce((sum, x) => sum + x, 0) / values.length
  // Second pass: takes back the rounding of a large common offset.
  return rough + values.reduce((sum, x) => sum + (x - rough), 0) / values.length
}

/** Middle value, or the mean of the two in the middle; the list is not empty. */
export const median = (values: readonly number[]): number => {
  const sorted = values.toSorted((a, b) => a - b)
  const half = sorted.length >> 1
  return sorted.length % 2 === 1 ? sorted[half]! : (sorted[half - 1]! + sorted[half]!) / 2
}

/** Standard deviation with n − 1; null for fewer than two values. */
export const sd = (values: readonly number[]): number | null => {
  if (values.length < 2) return null
  const m = mean(values)
  return Math.sqrt(values.reduce((sum, x) => sum + (x - m) ** 2, 0) / (values.length - 1))
}

/** Standard uncertainty of a mean: larger of √Σu²/n and s/√n; null for one value of unknown u. */
export const uOfMean = (values: readonly number[], us: readonly (number | null)[]): number | null => {
  const known = us.filter((u): u is number => u !== null)
  const predicted = known.length === values.length ? Math.hypot(...known) / values.length : null
  const scatter = sd(values)
  return larger(predicted, scatter === null ? null : scatter / Math.sqrt(values.length))
}

/** Straight line through the points; null for fewer than two different times. */
export const line = (points: readonly Point[]): Line | null => {
  if (points.length < 2) return null
  const weighed = points.every(({ u }) => u !== null && u > 0)
  const weights = points.map(({ u }) => (weighed ? u! ** -2 : 1))
  const total = weights.reduce((sum, w) => sum + w, 0)
  const first = points[0]!.at // times are large numbers: reckon from the first
  const middleAt = points.reduce((sum, { at }, i) => sum + weights[i]! * (at - first), 0) / total
  const middle = points.reduce((sum, { value }, i) => sum + weights[i]! * value, 0) / total
  let stt = 0
  let sty = 0
  points.forEach(({ at, value }, i) => {
    const t = at - first - middleAt
    stt += weights[i]! * t * t
    sty += weights[i]! * t * (value - middle)
  })
  if (!(stt > 0)) return null
  const slope = sty / stt
  const rss = points.reduce(
    (sum, { at, value }, i) => sum + weights[i]! * (value - middle - slope * (at - first - middleAt)) ** 2,
    0,
  )
  const predictedUSlope = weighed ? Math.sqrt(1 / stt) : null
  const observedUSlope = points.length > 2 ? Math.sqrt(rss / (points.length - 2) / stt) : null
  return {
    slope,
    uSlope: larger(predictedUSlope, observedUSlope),
    predictedUSlope,
    observedUSlope,
    middle,
    middleAt: first + middleAt,
  }
}

/** The larger of two uncertainties where both exist, the one that exists, or null. */
export const larger = (a: number | null, b: number | null): number | null =>
  a === null ? b : b === null ? a : Math.max(a, b)
