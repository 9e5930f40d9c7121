/** Local polynomials of the measured curve: slopes, curvatures and vertices free of any band shape (Savitzky & Golay 1964). */
import type { Points } from './separable.ts'
import { cholesky, inverse, solve } from './symmetric.ts'
import { correlationTime } from './uncertainty.ts'

/** Coefficients of powers of v = (x − centre)/reach. */
export interface LocalPolynomial {
  readonly coefficients: Float64Array
  /** Of the coefficients, row-major, scaled by the residuals and their correlation; made when asked for. */
  readonly covariance: () => Float64Array
}

/** First index with x ≥ value. */
const indexFrom = (x: Float64Array, value: number): number => {
  let low = 0
  let high = x.length
  while (low < high) {
    const middle = (low + high) >> 1
    if (x[middle]! < value) low = middle + 1
    else high = middle
  }
  return low
}

/** Weighted least squares over |x − centre| ≤ reach; null where too few points lie there. */
export const localPolynomial = (
  { x, y, weight }: Points,
  centre: number,
  reach: number,
  degree: number,
): LocalPolynomial | null => {
  const from = indexFrom(x, centre - reach)
  const to = indexFrom(x, centre + reach)
  const m = degree + 1
  if (to - from < 2 * m) return null
  const normal = new Float64Array(m * m)
  const right = new Float64Array(m)
  const powers = new Float64Array(2 * degree + 1)
  for (let i = from; i < to; i++) {
    const v = (x[i]! - centre) / reach
    let term = weight[i]! * weight[i]!
    for (let k = 0; k <= 2 * degree; k++) {
      powers[k]! += term
      if (k < m) right[k]! += term * y[i]!
      term *= v
    }
  }
  for (let i = 0; i < m; i++) for (let j = 0; j < m; j++) normal[i * m + j] = powers[i + j]!
  const factor = cholesky(normal, m)
  if (!factor) return null
  const coefficients = solve(factor, right)
  const covariance = () => {
    const residuals = new Float64Array(to - from)
    let square = 0
    for (let i = from; i < to; i++) {
      const v = (x[i]! - centre) / reach
      let f = 0
      for (let k = degree; k >= 0; k--) f = f * v + coefficients[k]!
      residuals[i - from] = (y[i]! - f) * weight[i]!
      square += residuals[i - from]! ** 2
    }
    const scale = (square / (to - from - m)) * correlationTime(residuals)
    return inverse(factor).map((c) => c * scale)
  }
  return { coefficients, covariance }
}

/** First or second derivative by v. */
export const derivative = (c: Float64Array, v: number, order: 1 | 2): number => {
  let sum = 0
  for (let k = order; k < c.length; k++) sum += c[k]! * (order === 1 ? k : k * (k - 1)) * v ** (k - order)
  return sum
}
