/**
 * Covariance of a solved recipe, all parameters together, and what correlated residuals do to it.
 *
 * With Gram matrix N of the Jacobian [Φ, c·D] over the parameters not held, cov = N⁻¹ · χ²/(n − p) · τ. The factor
 * τ = 1 + 2 Σ ρₖ is the integrated autocorrelation of the residuals (summed up to the first ρₖ that is no longer
 * significant, 2/√n), so n/τ is the effective number of points (Priestley, Spectral Analysis and Time Series, 1981, §5.3).
 */
import { freeParameters } from './levenbergMarquardt.ts'
import type { Selection } from './points.ts'
import { type Separated, separable } from './separable.ts'
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
  /** Condition of the Gram matrix scaled to a unit diagonal, by row sums. */
  readonly condition: number
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
  const { at } = solution
  const places = placesIn(recipe, solution)
  const gram = gramOf(at, at, places)
  const factor = cholesky(gram, places.size)
  const points = at.residuals.length
  if (!factor || points <= places.size) return null
  const tau = correlationTime(at.residuals)
  const scale = (solution.chi2 / (points - places.size)) * tau
  const covariance = inverse(factor)
  return uncertaintyFrom(
    places,
    covariance.map((value) => value * scale),
    points / tau,
    conditionOf(gram, covariance, places.size),
  )
}

/**
 * How well the fit repeats on the same compound. Where the recipe reaches the noise that is the uncertainty above. Where
 * it does not, residuals hold structure that comes again with every spectrum and is no scatter: with weights W² in the
 * fit and variances Σ of the noise alone, cov = N⁻¹ M N⁻¹, M the Gram matrix under the weights W⁴Σ (the sandwich of
 * Huber, Proc. Fifth Berkeley Symp. 1 (1967) 221). Σ is the noise times what the residuals, freed of all that is slower
 * than eleven points, have of scale and correlation
 * (`stated`: the noise as it stands, where points were joined and what is left between them is no noise).
 */
export const repeatabilityOf = (
  recipe: Recipe,
  solution: Solution,
  points: Selection,
  scatter: 'measured' | 'stated' = 'measured',
  asIfScatter: Uncertainty | null = uncertaintyOf(recipe, solution),
): Uncertainty | null => {
  if (!(recipe.misfit !== undefined && recipe.misfit > 0) || asIfScatter === null) return asIfScatter
  const { at, parameters } = solution
  const { x, y, weight, noise } = points
  const ofNoise = separable(recipe, { x, y, weight: weight.map((w, i) => w * w * noise[i]!) })(parameters)
  const places = placesIn(recipe, solution)
  const factor = cholesky(gramOf(at, at, places), places.size)
  // a height that other weights would hold at zero leaves its products unmade
  const isWhole = places.free.every((i) => ofNoise?.coefficients[i >> 1] !== 0)
  if (!factor || !ofNoise || !isWhole) return asIfScatter
  const bread = inverse(factor)
  const meat = gramOf(ofNoise, at, places)
  const fast = withoutSlow(at.residuals.map((r, i) => r / (weight[i]! * noise[i]!)))
  const tau = correlationTime(fast)
  const scale = scatter === 'stated' ? 1 : Math.max(1, MAD_TO_SIGMA * medianOf(fast.map(Math.abs))) ** 2 * tau
  const covariance = multiplied(multiplied(bread, meat, places.size), bread, places.size)
  return uncertaintyFrom(
    places,
    covariance.map((value) => value * scale),
    fast.length / tau,
    asIfScatter.condition,
  )
}

/** A normal distribution's median absolute deviation is 0.6745 σ. */
const MAD_TO_SIGMA = 1.4826

/** Quadratic through 11 points, its value at the middle (Savitzky & Golay, Anal. Chem. 36 (1964) 1627, table I). */
const SMOOTHING = [-36, 9, 44, 69, 84, 89, 84, 69, 44, 9, -36].map((c) => c / 429)
/** Part of the variance of white noise that is left when the quadratic is taken away: 1 − the middle coefficient. */
const LEFT_OVER = Math.sqrt(1 - SMOOTHING[5]!)

/** Residuals less the quadratic through their neighbours, scaled to the variance of white noise; the ends left out. */
const withoutSlow = (residuals: Float64Array): Float64Array => {
  const fast = new Float64Array(Math.max(0, residuals.length - 10))
  for (let i = 0; i < fast.length; i++) {
    let smooth = 0
    for (let k = 0; k < 11; k++) smooth += SMOOTHING[k]! * residuals[i + k]!
    fast[i] = (residuals[i + 5]! - smooth) / LEFT_OVER
  }
  return fast
}

const medianOf = (values: Float64Array): number => values.toSorted()[values.length >> 1] ?? 0

const multiplied = (a: Float64Array, b: Float64Array, size: number): Float64Array => {
  const product = new Float64Array(size * size)
  for (let r = 0; r < size; r++)
    for (let k = 0; k < size; k++)
      for (let s = 0; s < size; s++) product[r * size + s]! += a[r * size + k]! * b[k * size + s]!
  return product
}

/** Which coefficients and parameters of the search are not held, in the order of the matrices. */
interface Places {
  readonly active: readonly number[]
  readonly free: readonly number[]
  readonly size: number
}

const placesIn = (recipe: Recipe, { at, parameters }: Solution): Places => {
  const { box } = searchSpace(recipe)
  const free = freeParameters(parameters, at.gradient, box).filter((i) => at.coefficients[i >> 1]! > 0)
  return { active: at.active, free, size: at.active.length + free.length }
}

/** Gram matrix of the Jacobian [Φ, c·D] over what is not held, from the dot products of `of` and the heights of `at`. */
const gramOf = (of: Separated, { coefficients }: Separated, { active, free, size }: Places): Float64Array => {
  const m = coefficients.length
  const n = Math.sqrt(of.dD.length)
  const matrix = new Float64Array(size * size)
  active.forEach((i, r) => {
    active.forEach((j, s) => {
      matrix[r * size + s] = of.phiPhi[i * m + j]!
    })
    free.forEach((a, s) => {
      const value = of.phiD[i * n + a]! * coefficients[a >> 1]!
      matrix[r * size + active.length + s] = value
      matrix[(active.length + s) * size + r] = value
    })
  })
  free.forEach((a, r) => {
    free.forEach((b, s) => {
      matrix[(active.length + r) * size + active.length + s] =
        of.dD[a * n + b]! * coefficients[a >> 1]! * coefficients[b >> 1]!
    })
  })
  return matrix
}

/** ‖S A S‖·‖(S A S)⁻¹‖ in the norm of row sums, S scaling A to a unit diagonal. */
const conditionOf = (gram: Float64Array, inverted: Float64Array, size: number): number => {
  const largest = (entry: (r: number, s: number) => number) => {
    let most = 0
    for (let r = 0; r < size; r++) {
      let sum = 0
      for (let s = 0; s < size; s++) sum += Math.abs(entry(r, s))
      most = Math.max(most, sum)
    }
    return most
  }
  const scale = (i: number) => Math.sqrt(gram[i * size + i]!)
  return (
    largest((r, s) => gram[r * size + s]! / (scale(r) * scale(s))) *
    largest((r, s) => inverted[r * size + s]! * scale(r) * scale(s))
  )
}

const uncertaintyFrom = (
  { active, free, size }: Places,
  covariance: Float64Array,
  effectivePoints: number,
  condition: number,
): Uncertainty => {
  const entry = (r: number, s: number) => (r < 0 || s < 0 ? null : covariance[r * size + s]!)
  const place = (i: number) => {
    const k = free.indexOf(i)
    return k < 0 ? -1 : active.length + k
  }
  return {
    ofParameter: (i, j) => entry(place(i), place(j)),
    ofCoefficient: (i) => entry(active.indexOf(i), active.indexOf(i)),
    effectivePoints,
    fitted: size,
    condition,
  }
}
