import { larger } from './statistics.ts'

/**
 * Self-starting standardisation: turns values into z that are independent N(0, 1) while nothing changes, although
 * target and σ are only estimated from the few reference values and all in-control values since. Charts drawn of z then
 * have the run lengths of their design, also with five reference values.
 *
 * D. M. Hawkins, The Statistician 36 (1987) 299; C. P. Quesenberry, J. Quality Technology 23 (1991) 213. With n values
 * before, mean x̄ and standard deviation s, T = (x − x̄)/(s √(1 + 1/n)) follows Student's t with n − 1 degrees of
 * freedom, and z = Φ⁻¹(F_t(T)). Where σ is predicted by the uncertainties of the values, z = (x − x̄)/(σ √(1 + 1/n)).
 * The larger of s and σ counts, never their sum.
 *
 * Φ⁻¹(F_t(T)) by D. L. Wallace, Ann. Math. Statist. 30 (1959) 1124: z = (8ν + 1)/(8ν + 3) · √(ν ln(1 + T²/ν)) with the
 * sign of T. For ν ≥ 3 it is off by less than 0.04 up to z = 3, and above 1.5 towards zero.
 */
export interface Estimates {
  /** Values taken in. */
  readonly n: number
  readonly mean: number
  /** Sum of squared deviations from the mean (or from a target that is known). */
  readonly squares: number
  /** Sum of the squared uncertainties of the values; null once one is unknown. */
  readonly uSquares: number | null
  /** A target that was typed in or comes from another sample, with its standard uncertainty; null: estimated. */
  readonly target: { readonly value: number; readonly u: number } | null
}

export const startEstimates = (target: Estimates['target']): Estimates => ({
  n: 0,
  mean: target?.value ?? 0,
  squares: 0,
  uSquares: 0,
  target,
})

/** Takes in one value with its standard uncertainty (null where unknown). */
export const takeIn = (before: Estimates, x: number, u: number | null): Estimates => {
  const n = before.n + 1
  const uSquares = before.uSquares === null || u === null ? null : before.uSquares + u * u
  const deviation = x - before.mean
  if (before.target !== null) return { ...before, n, uSquares, squares: before.squares + deviation * deviation }
  const mean = before.mean + deviation / n
  return { ...before, n, uSquares, mean, squares: before.squares + deviation * (x - mean) }
}

/**
 * z of the next value and the σ used (in the value's unit), or null while too few values are there to know a σ: with an
 * estimated target and known uncertainties one value must be there, without them two (one with a known target).
 */
export const standardise = (
  estimates: Estimates,
  x: number,
  u: number | null,
): { readonly z: number; readonly sigma: number } | null => {
  const { n, mean, squares, uSquares, target } = estimates
  if (target === null && n === 0) return null
  const freedom = target === null ? n - 1 : n
  const observed = freedom > 0 ? Math.sqrt(squares / freedom) : null
  const predicted = uSquares === null || u === null ? null : Math.sqrt((uSquares + u * u) / (n + 1))
  const sigma = larger(observed, predicted)
  if (sigma === null || !(sigma > 0)) return null
  const spread = target === null ? sigma * Math.sqrt(1 + 1 / n) : Math.hypot(sigma, target.u)
  const t = (x - mean) / spread
  return { z: predicted === sigma ? t : normalOfStudent(t, freedom), sigma }
}

/** Standard normal deviate with the same tail probability as Student's `t` with `freedom` degrees of freedom. */
export const normalOfStudent = (t: number, freedom: number): number =>
  ((Math.sign(t) * (8 * freedom + 1)) / (8 * freedom + 3)) * Math.sqrt(freedom * Math.log1p((t * t) / freedom))
