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
import { fillColumns } from './columns.ts'
import { gramBlock, type Triple } from './gram.ts'
import type { Quadratic } from './levenbergMarquardt.ts'
import { nonNegative } from './nonNegative.ts'
import { backgroundAt, scatterOrigin } from './shapes.ts'
import { forward } from './symmetric.ts'
import type { Recipe } from './types.ts'

/** Points that enter a fit; `weight` is 1/σ. */
export interface Points {
  readonly x: Float64Array
  readonly y: Float64Array
  readonly weight: Float64Array
}

export interface Separated extends Quadratic {
  cost: number
  /** Heights in order of the components, then the background terms. */
  readonly coefficients: Float64Array
  /** Indices of the coefficients that are not held at zero. */
  active: readonly number[]
  /** ΦᵀΦ and ΦᵀD·c (unscaled by c), DᵀD; kept for the covariance of everything. */
  readonly phiPhi: Float64Array
  readonly phiD: Float64Array
  readonly dD: Float64Array
  /** Weighted. */
  readonly residuals: Float64Array
}

/**
 * The objective of a recipe on points, to be minimised over `searchSpace(recipe)`. Its columns are written anew by each call; a result that
 * is no longer needed may be given back as `spare`, to be written over.
 */
export const separable = (recipe: Recipe, points: Points): Objective => {
  const { x, weight } = points
  const { components, background } = recipe
  const bands = components.length
  const edge = recipe.windowPerCm[1]
  const { groups, rest, linearColumns, target } = columnsOf(recipe, points)
  const m = bands + background.length
  const n = 2 * bands
  const count = x.length
  // products of all columns: of each component its value and two slopes, then the background, then the measured values
  const size = 3 * (groups.length + rest.length)
  const products = new Float64Array(size * size)
  for (let i = 0; i < rest.length; i++)
    for (let j = 0; j <= i; j++) gramBlock(rest[i]!, rest[j]!, products, size, 3 * (bands + i), 3 * (bands + j))
  const places = Array.from({ length: m }, (_, i) => (i < bands ? 3 * i : 3 * bands + i - bands))
  const slopes = Array.from({ length: n }, (_, a) => 3 * (a >> 1) + 1 + (a & 1))
  const measured = [3 * bands + background.length]
  const signed = places.map((_, i) => i >= bands && background[i - bands]!.kind !== 'scatter')
  const pick = (rows: readonly number[], columns: readonly number[], into: Float64Array) => {
    let at = 0
    for (const row of rows) for (const k of columns) into[at++] = products[row * size + k]!
  }
  const solveLinear = nonNegative(m)
  const right = new Float64Array(m)
  const halves = new Float64Array(n * m)

  return (alpha, spare) => {
    for (let k = 0; k < bands; k++) {
      fillColumns(components[k]!, alpha[2 * k]!, alpha[2 * k + 1]!, edge, x, weight, groups[k]!)
      for (let l = 0; l <= k; l++) gramBlock(groups[k]!, groups[l]!, products, size, 3 * k, 3 * l)
      for (let l = 0; l < rest.length; l++) gramBlock(groups[k]!, rest[l]!, products, size, 3 * k, 3 * (bands + l))
    }
    const into = spare ?? emptyResult(m, n, count)
    const { coefficients, gradient, hessian, phiPhi, phiD, dD, residuals } = into
    pick(places, places, phiPhi)
    pick(places, measured, right)
    const linear = solveLinear(phiPhi, right, signed, coefficients)
    if (!linear) return null
    const { active, factor } = linear
    residuals.set(target)
    for (let k = 0; k < linearColumns.length; k++) takeAway(residuals, linearColumns[k]!, coefficients, 3 * k)
    let cost = 0
    for (let i = 0; i < count; i++) cost += residuals[i]! * residuals[i]!
    if (!Number.isFinite(cost)) return null
    pick(places, slopes, phiD)
    pick(slopes, slopes, dD)
    const held = active.length
    for (let a = 0; a < n; a++) {
      const c = coefficients[a >> 1]!
      let pull = products[slopes[a]! * size + measured[0]!]!
      for (let k = 0; k < held; k++) {
        const crossed = phiD[active[k]! * n + a]!
        halves[a * held + k] = crossed
        pull -= coefficients[active[k]!]! * crossed
      }
      gradient[a] = -c * pull
      forward(factor, halves, a * held)
      for (let b = 0; b <= a; b++) {
        let schur = dD[a * n + b]!
        for (let k = 0; k < held; k++) schur -= halves[a * held + k]! * halves[b * held + k]!
        hessian[a * n + b] = hessian[b * n + a] = c * coefficients[b >> 1]! * schur
      }
    }
    into.cost = cost / 2
    into.active = active
    return into
  }
}

type Objective = (alpha: Float64Array, spare?: Separated | null) => Separated | null

const emptyResult = (m: number, n: number, count: number): Separated => ({
  cost: 0,
  gradient: new Float64Array(n),
  hessian: new Float64Array(n * n),
  coefficients: new Float64Array(m),
  active: [],
  phiPhi: new Float64Array(m * m),
  phiD: new Float64Array(m * n),
  dD: new Float64Array(n * n),
  residuals: new Float64Array(count),
})

/** The columns of a fit, weighted: three of each component, background and measured values in threes, and those that are linear in threes. */
const columnsOf = (recipe: Recipe, { x, y, weight }: Points) => {
  const count = x.length
  const origin = scatterOrigin(recipe)
  // one piece of memory for all columns: many small ones cost as much as the sums
  const memory = new Float64Array(count * (3 * recipe.components.length + recipe.background.length + 2))
  let taken = 0
  const column = () => {
    taken += count
    return memory.subarray(taken - count, taken)
  }
  const target = column()
  for (let i = 0; i < count; i++) target[i] = y[i]! * weight[i]!
  const groups: readonly Triple[] = recipe.components.map(() => [column(), column(), column()])
  const fixed = recipe.background.map((term) => {
    const background = column()
    for (let i = 0; i < count; i++) background[i] = backgroundAt(term, origin, x[i]!) * weight[i]!
    return background
  })
  const empty = column()
  const linearColumns = inTriples([...groups.map(([value]) => value), ...fixed], empty)
  return { target, groups, rest: inTriples([...fixed, target], empty), linearColumns }
}

/** Filled up with an empty column. */
const inTriples = (columns: readonly Float64Array[], empty: Float64Array): readonly Triple[] =>
  Array.from({ length: Math.ceil(columns.length / 3) }, (_, k) => [
    columns[3 * k]!,
    columns[3 * k + 1] ?? empty,
    columns[3 * k + 2] ?? empty,
  ])

const takeAway = (from: Float64Array, [a, b, c]: Triple, coefficients: Float64Array, at: number): void => {
  const p = coefficients[at]!
  const q = coefficients[at + 1] ?? 0
  const r = coefficients[at + 2] ?? 0
  for (let i = 0; i < from.length; i++) from[i] = from[i]! - p * a[i]! - q * b[i]! - r * c[i]!
}
