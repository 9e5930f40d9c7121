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
import { backgroundAt, backgroundExponents, fillColumns, fillSkewed, scatterOrigin } from './shapes.ts'
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
  let sum = 0
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!
  return sum
}

/** Dot products of one column with others, four at a time: reading the columns is what takes the time. */
const products = (a: Float64Array, others: readonly Float64Array[]): Float64Array => {
  const result = new Float64Array(others.length)
  const count = a.length
  let k = 0
  for (; k + 4 <= others.length; k += 4) {
    const [b, c, d, e] = [others[k]!, others[k + 1]!, others[k + 2]!, others[k + 3]!]
    let s0 = 0
    let s1 = 0
    let s2 = 0
    let s3 = 0
    for (let i = 0; i < count; i++) {
      const v = a[i]!
      s0 += v * b[i]!
      s1 += v * c[i]!
      s2 += v * d[i]!
      s3 += v * e[i]!
    }
    result[k] = s0
    result[k + 1] = s1
    result[k + 2] = s2
    result[k + 3] = s3
  }
  for (; k < others.length; k++) result[k] = dot(a, others[k]!)
  return result
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
    components.forEach(({ kind, skew }, k) => {
      if (skew) {
        fillSkewed(skew, alpha[2 * k]!, alpha[2 * k + 1]!, x, weight, phi[k]!, slopes[2 * k]!, slopes[2 * k + 1]!)
        return
      }
      fillColumns(kind, alpha[2 * k]!, alpha[2 * k + 1]!, edge, x, weight, phi[k]!, slopes[2 * k]!, slopes[2 * k + 1]!)
    })
    const phiPhi = new Float64Array(m * m)
    const right = new Float64Array(m)
    for (let i = 0; i < m; i++) {
      const row = products(phi[i]!, [target, ...phi.slice(0, i + 1)])
      right[i] = row[0]!
      for (let j = 0; j <= i; j++) phiPhi[i * m + j] = phiPhi[j * m + i] = row[j + 1]!
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
      if (c === 0) continue
      const row = products(slopes[a]!, [residuals, ...phi, ...slopes.slice(0, a + 1)])
      gradient[a] = -c * row[0]!
      for (let i = 0; i < m; i++) phiD[i * n + a] = row[i + 1]!
      for (let b = 0; b <= a; b++) if (coefficients[b >> 1]! !== 0) dD[a * n + b] = dD[b * n + a] = row[m + 1 + b]!
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
