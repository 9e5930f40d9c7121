/**
 * Generalised least squares of band positions y with covariance V on (Δ, B, C):
 *
 *   χ²(p) = (y − E(p))ᵀ V⁻¹ (y − E(p)) + ((C/B − κ) / u_κ)²
 *
 * the last term only where the bands leave C open. Minima are found in two steps. Energies are homogeneous of degree
 * one, E(s p) = s E(p), so along a direction (Δ : B : C) the best scale s is linear: χ² becomes a function of the
 * direction alone, which is scanned over all Δ/B (and C/B where C is free). Every local minimum of the scan is then
 * sharpened by Levenberg–Marquardt steps, so a second solution is not overlooked.
 */
import { type BandModel, direction, STEPS, scanOf } from './model.ts'

export interface Prior {
  readonly cOverB: number
  readonly uCOverB: number
}

export interface Problem {
  readonly model: BandModel
  /** Band positions, cm⁻¹. */
  readonly observed: readonly number[]
  /** V⁻¹ = WᵀW; W lower triangular, rows first. */
  readonly whitener: Float64Array
  /** Which of Δ, B, C are searched. */
  readonly free: readonly boolean[]
  /** Where the bands depend on C but cannot fix it; also the C/B at which the scan runs. */
  readonly prior: Prior | null
  /** C/B that stands in where C has no influence or no prior. */
  readonly cOverB: number
}

export interface Minimum {
  /** Δ, B, C. */
  readonly p: readonly [number, number, number]
  readonly chi2: number
  /** Jᵀ V⁻¹ J with the prior's part, 3 × 3, rows and columns of parameters that are not searched zero. */
  readonly normal: Float64Array
  readonly iterations: number
}

/** Lower triangular W with WᵀW = V⁻¹, or null where V is not positive definite. */
export const whitenerOf = (covariance: readonly (readonly number[])[]): Float64Array | null => {
  const n = covariance.length
  const l = new Float64Array(n * n) // V = L Lᵀ, W = L⁻¹
  for (let i = 0; i < n; i += 1)
    for (let j = 0; j <= i; j += 1) {
      let sum = covariance[i]![j]!
      for (let k = 0; k < j; k += 1) sum -= l[i * n + k]! * l[j * n + k]!
      if (i === j) {
        if (!(sum > 1e-12 * covariance[i]![i]!) || !Number.isFinite(sum)) return null
        l[i * n + i] = Math.sqrt(sum)
      } else l[i * n + j] = sum / l[j * n + j]!
    }
  const w = new Float64Array(n * n)
  for (let column = 0; column < n; column += 1)
    for (let i = column; i < n; i += 1) {
      let sum = i === column ? 1 : 0
      for (let k = column; k < i; k += 1) sum -= l[i * n + k]! * w[k * n + column]!
      w[i * n + column] = sum / l[i * n + i]!
    }
  return w
}

const MOST = 16
const positions = new Float64Array(MOST)
const derivatives = new Float64Array(MOST * 3)
const whiteResidual = new Float64Array(MOST + 1)
const whiteJacobian = new Float64Array((MOST + 1) * 3)

/** Fills the whitened residuals and Jacobian at p and returns χ². */
const linearise = (problem: Problem, p: readonly number[]): number => {
  const { model, observed, whitener, prior } = problem
  const n = model.count
  model.evaluate(p[0]!, p[1]!, p[2]!, positions, derivatives)
  let chi2 = 0
  for (let i = 0; i < n; i += 1) {
    let r = 0
    let d0 = 0
    let d1 = 0
    let d2 = 0
    for (let j = 0; j <= i; j += 1) {
      const w = whitener[i * n + j]!
      r += w * (observed[j]! - positions[j]!)
      d0 += w * derivatives[j * 3]!
      d1 += w * derivatives[j * 3 + 1]!
      d2 += w * derivatives[j * 3 + 2]!
    }
    whiteResidual[i] = r
    whiteJacobian[i * 3] = d0
    whiteJacobian[i * 3 + 1] = d1
    whiteJacobian[i * 3 + 2] = d2
    chi2 += r * r
  }
  if (prior !== null) {
    const ratio = p[2]! / p[1]!
    whiteResidual[n] = (prior.cOverB - ratio) / prior.uCOverB
    whiteJacobian[n * 3] = 0
    whiteJacobian[n * 3 + 1] = -ratio / p[1]! / prior.uCOverB
    whiteJacobian[n * 3 + 2] = 1 / p[1]! / prior.uCOverB
    chi2 += whiteResidual[n]! ** 2
  }
  return chi2
}

/** JᵀJ and Jᵀr of the free parameters; 1 on the diagonal of the others, so that they stand still. */
const normalEquations = (
  rows: number,
  free: readonly boolean[],
  normal: Float64Array,
  gradient: Float64Array,
): void => {
  for (let a = 0; a < 3; a += 1) {
    let g = 0
    for (let i = 0; i < rows; i += 1) g += whiteJacobian[i * 3 + a]! * whiteResidual[i]!
    gradient[a] = free[a]! ? g : 0
    for (let b = 0; b <= a; b += 1) {
      let sum = 0
      if (free[a]! && free[b]!)
        for (let i = 0; i < rows; i += 1) sum += whiteJacobian[i * 3 + a]! * whiteJacobian[i * 3 + b]!
      normal[a * 3 + b] = sum
      normal[b * 3 + a] = sum
    }
  }
}

/** Solves the damped 3 × 3 system by Cholesky; false where it is not positive definite. */
const step = (normal: Float64Array, gradient: Float64Array, damping: number, out: number[]): boolean => {
  const d = (a: number): number => (normal[a * 4]! === 0 ? 1 : normal[a * 4]! * (1 + damping))
  const l00 = Math.sqrt(d(0))
  const l10 = normal[3]! / l00
  const l20 = normal[6]! / l00
  const s11 = d(1) - l10 * l10
  if (!(s11 > 1e-14 * d(1))) return false
  const l11 = Math.sqrt(s11)
  const l21 = (normal[7]! - l20 * l10) / l11
  const s22 = d(2) - l20 * l20 - l21 * l21
  if (!(s22 > 1e-14 * d(2))) return false
  const l22 = Math.sqrt(s22)
  const y0 = gradient[0]! / l00
  const y1 = (gradient[1]! - l10 * y0) / l11
  const y2 = (gradient[2]! - l20 * y0 - l21 * y1) / l22
  out[2] = y2 / l22
  out[1] = (y1 - l21 * out[2]!) / l11
  out[0] = (y0 - l10 * out[1]! - l20 * out[2]!) / l00
  return true
}

/** Levenberg–Marquardt from `start`; Δ, B, C stay positive. Ends on a relative step below 1e-11 or no way down. */
export const descend = (problem: Problem, start: readonly number[]): Minimum => {
  const { free, model, prior, cOverB } = problem
  const rows = model.count + (prior === null ? 0 : 1)
  const tied = !free[2] // C follows B where it is not searched: it has no influence then
  const p: [number, number, number] = [start[0]!, start[1]!, start[2]!]
  const trial: [number, number, number] = [0, 0, 0]
  const move = [0, 0, 0]
  const normal = new Float64Array(9)
  const gradient = new Float64Array(3)
  let chi2 = linearise(problem, p)
  let damping = 0
  let iterations = 0
  let stale = false // whether the Jacobian is that of a refused trial
  while (iterations < 60) {
    iterations += 1
    normalEquations(rows, free, normal, gradient)
    let better = false
    let size = Number.POSITIVE_INFINITY
    while (!better && damping < 1e12) {
      if (step(normal, gradient, damping, move)) {
        size = 0
        for (let a = 0; a < 3; a += 1) {
          const wanted = p[a]! + (free[a]! ? move[a]! : 0)
          trial[a] = Math.max(wanted, p[a]! / 4)
          if (p[a]! > 0) size = Math.max(size, Math.abs(trial[a]! - p[a]!) / p[a]!)
        }
        if (tied) trial[2] = cOverB * trial[1]!
        if (size < 1e-11) break
        const now = linearise(problem, trial)
        stale = true
        // near a minimum χ² is flat to rounding: small undamped steps are trusted, so that p settles to 1e-11
        const settling = chi2 > 1e-9 && damping === 0 && size < 1e-5 && now <= chi2 * (1 + 1e-9)
        if (now < chi2 || settling) {
          better = true
          stale = false
          chi2 = now
          p[0] = trial[0]
          p[1] = trial[1]
          p[2] = trial[2]
          damping = damping < 1e-6 ? 0 : damping / 10
          continue
        }
      }
      damping = damping === 0 ? 1e-4 : damping * 10
    }
    if (!better || size < 1e-11) break
  }
  if (stale) chi2 = linearise(problem, p)
  normalEquations(rows, free, normal, gradient)
  return { p, chi2, normal, iterations }
}

const profile = new Float64Array(STEPS + 1)
const scale = new Float64Array(STEPS + 1)
/** V⁻¹ and V⁻¹y. */
const weights = new Float64Array(MOST * MOST)
const weighted = new Float64Array(MOST)

/** Starting points: local minima of χ² over the direction, best scale inside. Appended to `starts`. */
const scan = (problem: Problem, cOverB: number, starts: number[][]): void => {
  const { model, observed, whitener } = problem
  const n = model.count
  const table = scanOf(model.scheme, cOverB)
  const width = model.scheme.transitions.length
  const { columns } = model
  for (let i = 0; i < n; i += 1) {
    let sum = 0
    for (let j = 0; j < n; j += 1) {
      let v = 0
      for (let m = Math.max(i, j); m < n; m += 1) v += whitener[m * n + i]! * whitener[m * n + j]!
      weights[i * n + j] = v
      sum += v * observed[j]!
    }
    weighted[i] = sum
  }
  profile[0] = Number.POSITIVE_INFINITY
  profile[STEPS] = Number.POSITIVE_INFINITY
  for (let k = 1; k < STEPS; k += 1) {
    const row = (k - 1) * width
    let ff = 0
    let fy = 0
    for (let i = 0; i < n; i += 1) {
      const f = table[row + columns[i]!]!
      let along = weights[i * n + i]! * f
      for (let j = 0; j < i; j += 1) along += 2 * weights[i * n + j]! * table[row + columns[j]!]!
      ff += f * along
      fy += f * weighted[i]!
    }
    scale[k] = fy / ff
    profile[k] = fy > 0 && ff > 0 ? -(fy * fy) / ff : Number.POSITIVE_INFINITY
  }
  for (let k = 1; k < STEPS; k += 1) {
    if (profile[k]! >= profile[k - 1]! || profile[k]! > profile[k + 1]!) continue
    const [delta, b] = direction(k)
    const s = scale[k]!
    starts.push([s * delta, s * b, s * b * cOverB])
  }
}

const FREE_C_OVER_B = [3, 3.75, 4.5, 5.25, 6, 7.5]

/** All distinct minima with positive Δ and B, best first; empty where no direction has a positive scale. */
export const minimaOf = (problem: Problem): readonly Minimum[] => {
  const starts: number[][] = []
  const cFree = problem.free[2]! && problem.prior === null
  for (const ratio of cFree ? FREE_C_OVER_B : [problem.cOverB]) scan(problem, ratio, starts)
  const found: Minimum[] = []
  for (const start of starts) {
    const minimum = descend(problem, start)
    const same = found.findIndex(({ p }) =>
      p.every((value, a) => !problem.free[a] || Math.abs(value - minimum.p[a]!) <= 1e-6 * (value + minimum.p[a]!)),
    )
    if (same === -1) found.push(minimum)
  }
  return found.sort((a, b) => a.chi2 - b.chi2)
}
