/**
 * The maximum of the measured curve near a component: what people read off by eye, free of any band shape.
 *
 * A polynomial of degree 4 in v = (x − x₀)/h, fitted by weighted least squares over |v| ≤ 1 (Savitzky & Golay 1964; for
 * a Gaussian and h = 0.3 widths it is off by less than 10⁻⁴ of the height). At the vertex v* f′ = 0 and f″ < 0;
 * u(v*) = √(var f′(v*)) / |f″(v*)|, the variance scaled by the residuals and their correlation.
 */
import { derivative, type LocalPolynomial, localPolynomial } from './localPolynomial.ts'
import type { Points } from './separable.ts'

export interface CurveMaximum {
  readonly positionPerCm: number
  readonly uPositionPerCm: number | null
}

const DEGREE = 4
/** Half the stretch a maximum is read from, at most: a broad component may hide a narrower top. cm⁻¹ */
const WIDEST_REACH_PER_CM = 1000

/** Vertex nearest v = 0 with |v| ≤ 1; null where the polynomial has no maximum there. */
const vertex = (c: Float64Array): number | null => {
  const steps = 16
  let best: number | null = null
  for (let k = 0; k < steps; k++) {
    let low = -1 + (2 * k) / steps
    let high = -1 + (2 * (k + 1)) / steps
    if (derivative(c, low, 1) < 0 || derivative(c, high, 1) >= 0) continue
    for (let round = 0; round < 50; round++) {
      const middle = (low + high) / 2
      if (derivative(c, middle, 1) >= 0) low = middle
      else high = middle
    }
    if (best === null || Math.abs(low) < Math.abs(best)) best = low
  }
  return best
}

/** Places where the smoothed curve turns from rising to falling, within `range` of `centre`. */
const turningPoints = (points: Points, centre: number, range: number, reach: number): readonly number[] => {
  const steps = 12
  const slopes = Array.from({ length: 2 * steps + 1 }, (_, k) => {
    const at = centre + ((k - steps) / steps) * range
    const local = localPolynomial(points, at, reach, 2) ?? localPolynomial(points, at, 2 * reach, 2)
    return { at, slope: local ? local.coefficients[1]! : Number.NaN }
  })
  return slopes.slice(1).flatMap(({ at, slope }, k) => {
    const before = slopes[k]!
    return before.slope > 0 && slope <= 0
      ? [before.at + ((at - before.at) * before.slope) / (before.slope - slope)]
      : []
  })
}

/** The curve's maximum nearest `positionPerCm`, within 0.6 widths of it; null where it has none or lies at the end of the data. */
export const curveMaximum = (points: Points, positionPerCm: number, widthPerCm: number): CurveMaximum | null => {
  const reach = Math.min(WIDEST_REACH_PER_CM, 0.3 * widthPerCm)
  const turns = turningPoints(points, positionPerCm, 0.6 * widthPerCm, reach / 2)
  if (turns.length === 0) return null
  let at = turns.reduce((best, t) => (Math.abs(t - positionPerCm) < Math.abs(best - positionPerCm) ? t : best))
  for (let round = 0; round < 8; round++) {
    // Thinly measured curves: a parabola has to do.
    const local = localPolynomial(points, at, reach, DEGREE) ?? localPolynomial(points, at, reach, 2)
    const v = local && vertex(local.coefficients)
    if (!local || v === null) return null
    at += v * reach
    if (Math.abs(v) > 0.02 && round < 7) continue
    return { positionPerCm: at, uPositionPerCm: uVertex(local, v, reach) }
  }
  return null
}

const uVertex = (local: LocalPolynomial, v: number, reach: number): number | null => {
  const { coefficients } = local
  const covariance = local.covariance()
  const m = coefficients.length
  let variance = 0
  for (let i = 1; i < m; i++) for (let j = 1; j < m; j++) variance += i * j * v ** (i + j - 2) * covariance[i * m + j]!
  const curvature = derivative(coefficients, v, 2)
  return variance >= 0 && curvature < 0 ? (Math.sqrt(variance) / -curvature) * reach : null
}
