/**
 * Covariance of a solved recipe, all parameters together, and what correlated residuals do to it.
 *
 * With Gram matrix N of the Jacobian [Φ, c·D] over the parameters not held, cov = N⁻¹ · χ²/(n − p) · τ. The factor
 * τ = 1 + 2 Σ ρₖ is the integrated autocorrelation of the residuals (summed up to the first ρₖ that is no longer
 * significant, 2/√n), so n/τ is the effective number of points (Priestley, Spectral Analysis and Time Series, 1981, §5.3).
 */
import { freeParameters } from './levenbergMarquardt.ts'
import { searchSpace } from './shapes.ts'
import type { Solution } from './solveRecipe.ts'
import { cholesky, inverse } from './symmetric.ts'
import type { Recipe } from './types.ts'

export interface Uncertainty {
  /** Parameters of the search, in its order; null where held at a bound or without a band. cm⁻² and the like. */
  readonly ofParameter: (i: number, j: number) => number | null
  /** Variance of a height or background coefficient; null where held at zero. */
  readonly ofCoefficient: (i: number) => number | null
  readonly effectivePoints: number
  /** Number of parameters not held. */
  readonly fitted: number
}

/** τ ≥ 1 of a sequence of residuals in order of the axis. */
export const correlationTime = (residuals: Float64Array): number => {
  const n = residuals.length
  let square = 0
  for (let i = 0; i < n; i++) square += residuals[i]! * residuals[i]!
  if (!(square > 0)) return 1
  const significant = 2 / Math.sqrt(n)
  let sum = 0
  for (let lag = 1; lag < n / 2; lag++) {
    let product = 0
    for (let i = lag; i < n; i++) product += residuals[i]! * residuals[i - lag]!
    const rho = product / square
    if (rho < significant) break
    sum += rho
  }
  return 1 + 2 * sum
}

/** Null where the parameters can't be told apart on these points. */
export const uncertaintyOf = (recipe: Recipe, solution: Solution): Uncertainty | null => {
  const { at, parameters } = solution
  const { box } = searchSpace(recipe)
  const m = at.coefficients.length
  const n = parameters.length
  const free = freeParameters(parameters, at.gradient, box).filter((i) => at.coefficients[i >> 1]! > 0)
  const size = at.active.length + free.length
  const matrix = new Float64Array(size * size)
  at.active.forEach((i, r) => {
    at.active.forEach((j, s) => {
      matrix[r * size + s] = at.phiPhi[i * m + j]!
    })
    free.forEach((a, s) => {
      const value = at.phiD[i * n + a]! * at.coefficients[a >> 1]!
      matrix[r * size + at.active.length + s] = value
      matrix[(at.active.length + s) * size + r] = value
    })
  })
  free.forEach((a, r) => {
    free.forEach((b, s) => {
      matrix[(at.active.length + r) * size + at.active.length + s] =
        at.dD[a * n + b]! * at.coefficients[a >> 1]! * at.coefficients[b >> 1]!
    })
  })
  const factor = cholesky(matrix, size)
  const points = at.residuals.length
  if (!factor || points <= size) return null
  const tau = correlationTime(at.residuals)
  const scale = (solution.chi2 / (points - size)) * tau
  const covariance = inverse(factor)
  const place = (i: number) => {
    const k = free.indexOf(i)
    return k < 0 ? -1 : at.active.length + k
  }
  const entry = (r: number, s: number) => (r < 0 || s < 0 ? null : covariance[r * size + s]! * scale)
  return {
    ofParameter: (i, j) => entry(place(i), place(j)),
    ofCoefficient: (i) => entry(at.active.indexOf(i), at.active.indexOf(i)),
    effectivePoints: points / tau,
    fitted: size,
  }
}
