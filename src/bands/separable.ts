/**
 * Separable least squares. y ≈ Φ(α) c, weighted; for given α the linear part c (heights, background) is solved
 * inside, heights and scatter ≥ 0, and the search runs over α only (Golub & Pereyra, SIAM J. Numer. Anal. 10 (1973) 413).
 *
 * With P the projector onto the complement of the columns of Φ in use, r = P y, and Dₐ = cₖ ∂φₖ/∂αₐ, Kaufman's
 * approximation (BIT 15 (1975) 49) takes −P D for the Jacobian of r. Its Gram matrix is a Schur complement,
 *   H = DᵀD − DᵀΦ (ΦᵀΦ)⁻¹ ΦᵀD,  g = −Dᵀr  (exact, since r ⟂ Φ),
 * so one pass over the data that collects dot products of the columns serves heights, gradient and step.
 * H⁻¹ is at the same time the marginal covariance of α in the full problem.
 */
import type { Quadratic } from './levenbergMarquardt.ts'
import { backgroundAt, backgroundExponents, fillColumns, scatterOrigin } from './shapes.ts'
import { cholesky, forward, solve, submatrix } from './symmetric.ts'
import type { Recipe } from './types.ts'

/** Points that enter a fit; `weight` is 1/σ. */
export interface Points {
  readonly x: Float64Array
  readonly y: Float64Array
  readonly weight: Float64Array
}

export interface Separated extends Quadratic {
  /** Heights in order of the components, then the background terms. */
  readonly coefficients: Float64Array
  /** Indices of the coefficients that are not held at zero. */
  readonly active: readonly number[]
  /** ΦᵀΦ and ΦᵀD·c (unscaled by c), DᵀD; kept for the covariance of everything. */
  readonly phiPhi: Float64Array
  readonly phiD: Float64Array
  readonly dD: Float64Array
  /** Weighted. */
  readonly residuals: Float64Array
}

const dot = (a: Float64Array, b: Float64Array): number => {
  const n = a.length
  const whole = n - (n % 4)
  let s0 = 0
  let s1 = 0
  let s2 = 0
  let s3 = 0
  let i = 0
  for (; i < whole; i += 4) {
    s0 += a[i]! * b[i]!
    s1 += a[i + 1]! * b[i + 1]!
    s2 += a[i + 2]! * b[i + 2]!
    s3 += a[i + 3]! * b[i + 3]!
  }
  for (; i < n; i++) s0 += a[i]! * b[i]!
  return s0 + s1 + (s2 + s3)
}

/** Least squares with some coefficients ≥ 0 (Lawson & Hanson 1974, ch. 23, by dropping from the full set and letting back in). */
const nonNegative = (
  gram: Float64Array,
  right: Float64Array,
  signed: readonly boolean[],
): { readonly coefficients: Float64Array; readonly active: readonly number[] } | null => {
  const m = right.length
  let active = Array.from({ length: m }, (_, i) => i).filter((i) => gram[i * m + i]! > 0)
  const coefficients = new Float64Array(m)
  for (let round = 0; round < 3 * m; round++) {
    const factor = cholesky(submatrix(gram, m, active), active.length)
    if (!factor) {
      // Two columns tell the same: let go of the last one that may be zero.
      const last = active.findLast((i) => !signed[i]) ?? active.at(-1)
      if (last === undefined) return null
      active = active.filter((i) => i !== last)
      continue
    }
    const solution = solve(
      factor,
      Float64Array.from(active, (i) => right[i]!),
    )
    const worst = active.reduce((w, i, k) => (!signed[i] && solution[k]! < (w < 0 ? 0 : solution[w]!) ? k : w), -1)
    if (worst >= 0) {
      active = active.filter((_, k) => k !== worst)
      continue
    }
    coefficients.fill(0)
    active.forEach((i, k) => {
      coefficients[i] = solution[k]!
    })
    const held = Array.from({ length: m }, (_, i) => i).filter((i) => !active.includes(i) && gram[i * m + i]! > 0)
    const pull = (i: number) => {
      let sum = right[i]!
      for (let j = 0; j < m; j++) sum -= gram[i * m + j]! * coefficients[j]!
      return sum / Math.sqrt(gram[i * m + i]!)
    }
    const back = held.find((i) => pull(i) > 1e-9 * Math.abs(right[i]! / Math.sqrt(gram[i * m + i]!)))
    if (back === undefined || round > m) return { coefficients, active }
    active = [...active, back].sort((a, b) => a - b)
  }
  return { coefficients, active }
}

/** The objective of a recipe on points, to be minimised over `searchSpace(recipe)`. */
export const separable = (recipe: Recipe, { x, y, weight }: Points): ((alpha: Float64Array) => Separated | null) => {
  const { components } = recipe
  const exponents = backgroundExponents(recipe)
  const count = x.length
  const nBands = components.length
  const m = nBands + exponents.length
  const n = 2 * nBands
  const edge = recipe.windowPerCm[1]
  const origin = scatterOrigin(recipe)
  const column = () => new Float64Array(count)
  const target = y.map((v, i) => v * weight[i]!)
  const phi = Array.from({ length: m }, column)
  const slopes = Array.from({ length: n }, column)
  exponents.forEach((exponent, k) => {
    const fixed = phi[nBands + k]!
    for (let i = 0; i < count; i++) fixed[i] = backgroundAt(exponent, origin, x[i]!) * weight[i]!
  })
  const signed = Array.from({ length: m }, (_, i) => i >= nBands && exponents[i - nBands] === 0)

  return (alpha) => {
    components.forEach(({ kind }, k) => {
      fillColumns(kind, alpha[2 * k]!, alpha[2 * k + 1]!, edge, x, weight, phi[k]!, slopes[2 * k]!, slopes[2 * k + 1]!)
    })
    const phiPhi = new Float64Array(m * m)
    const right = new Float64Array(m)
    for (let i = 0; i < m; i++) {
      right[i] = dot(phi[i]!, target)
      for (let j = 0; j <= i; j++) phiPhi[i * m + j] = phiPhi[j * m + i] = dot(phi[i]!, phi[j]!)
    }
    const linear = nonNegative(phiPhi, right, signed)
    if (!linear) return null
    const { coefficients, active } = linear
    const residuals = target.slice()
    for (const i of active) {
      const c = coefficients[i]!
      const f = phi[i]!
      for (let k = 0; k < count; k++) residuals[k] = residuals[k]! - c * f[k]!
    }
    const cost = dot(residuals, residuals) / 2
    const phiD = new Float64Array(m * n)
    const dD = new Float64Array(n * n)
    const gradient = new Float64Array(n)
    for (let a = 0; a < n; a++) {
      const c = coefficients[a >> 1]!
      gradient[a] = c === 0 ? 0 : -c * dot(slopes[a]!, residuals)
      if (c === 0) continue
      for (let i = 0; i < m; i++) phiD[i * n + a] = dot(phi[i]!, slopes[a]!)
      for (let b = 0; b <= a; b++)
        if (coefficients[b >> 1]! !== 0) dD[a * n + b] = dD[b * n + a] = dot(slopes[a]!, slopes[b]!)
    }
    const factor = cholesky(submatrix(phiPhi, m, active), active.length)
    if (!factor || !Number.isFinite(cost)) return null
    const halves = Array.from({ length: n }, (_, a) =>
      forward(
        factor,
        Float64Array.from(active, (i) => phiD[i * n + a]!),
      ),
    )
    const hessian = new Float64Array(n * n)
    for (let a = 0; a < n; a++)
      for (let b = 0; b <= a; b++) {
        const schur = dD[a * n + b]! - dot(halves[a]!, halves[b]!)
        hessian[a * n + b] = hessian[b * n + a] = coefficients[a >> 1]! * coefficients[b >> 1]! * schur
      }
    return { cost, gradient, hessian, coefficients, active, phiPhi, phiD, dD, residuals }
  }
}
