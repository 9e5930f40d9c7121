/**
 * Bounded Levenberg–Marquardt for F(p) = ½ Σ rᵢ(p)².
 *
 * A step s solves (H + λ D) s = −g over the parameters that are free, with g = Jᵀr, H = JᵀJ and D the largest diag H met
 * so far (Marquardt 1963; Moré 1978: the search is independent of units and does not run off where a column fades). A parameter on a bound whose gradient points
 * outward is held there; a step that would leave the box is cut at its sides, parameter by parameter.
 * λ follows the gain ratio ρ = actual / predicted reduction (Nielsen 1999; Madsen, Nielsen & Tingleff,
 * Methods for Non-Linear Least Squares Problems, 2004, §3.2). Stops are those of Moré (1978): the cosine
 * between residuals and tangent space, the relative change of F, the relative step.
 */
import { cholesky, gathered, roomFor, solveInPlace, submatrix } from './symmetric.ts'

/** F, Jᵀr and JᵀJ (row-major) at a point. */
export interface Quadratic {
  readonly cost: number
  readonly gradient: Float64Array
  readonly hessian: Float64Array
}

export interface Box {
  readonly lower: Float64Array
  readonly upper: Float64Array
}

/** Relative error with which a sum of squares is known. */
const ROUNDING = 1e-13

export interface Tolerances {
  readonly relativeChange: number
  readonly gradient: number
  readonly step: number
  readonly iterations: number
  /** λ at the start: small where the start is good. */
  readonly damping?: number
}

export interface Minimum<Q extends Quadratic = Quadratic> {
  readonly parameters: Float64Array
  readonly at: Q
  readonly iterations: number
  readonly stopped: 'relative change' | 'gradient' | 'step' | 'iterations'
}

/** Parameters that may move: not on a bound with the gradient pushing outward. */
export const freeParameters = (p: Float64Array, gradient: Float64Array, { lower, upper }: Box): readonly number[] => {
  const free: number[] = []
  for (let i = 0; i < p.length; i++) {
    const held =
      lower[i]! >= upper[i]! || (p[i]! <= lower[i]! && gradient[i]! >= 0) || (p[i]! >= upper[i]! && gradient[i]! <= 0)
    if (!held) free.push(i)
  }
  return free
}

/** Largest cosine between the residual vector and a column of the Jacobian. */
const largestCosine = ({ cost, gradient, hessian }: Quadratic, free: readonly number[]): number => {
  const n = gradient.length
  const norm = Math.sqrt(2 * cost)
  let largest = 0
  for (const i of free) {
    const column = Math.sqrt(hessian[i * n + i]!)
    if (column > 0 && norm > 0) largest = Math.max(largest, Math.abs(gradient[i]!) / (column * norm))
  }
  return largest
}

/** Damped step over the free parameters, cut at the box, into `step`; false where the damped matrix is singular. */
const boundedSteps = (n: number, { lower, upper }: Box) => {
  const room = roomFor(n)
  const damped = new Float64Array(n * n)
  const partial = new Float64Array(n)
  return (
    p: Float64Array,
    at: Quadratic,
    free: readonly number[],
    diagonal: Float64Array,
    lambda: number,
    step: Float64Array,
  ): boolean => {
    // A column without influence (a band of height zero) has no step.
    const moving = free.filter((i) => at.hessian[i * n + i]! > 0)
    const m = moving.length
    submatrix(at.hessian, n, moving, damped)
    for (let i = 0; i < m; i++) damped[i * m + i]! += lambda * diagonal[moving[i]!]!
    const factor = cholesky(damped, m, 1e-13, room)
    if (!factor) return false
    solveInPlace(factor, gathered(at.gradient, moving, partial))
    step.fill(0)
    for (let k = 0; k < m; k++) {
      const i = moving[k]!
      step[i] = Math.min(upper[i]!, Math.max(lower[i]!, p[i]! - partial[k]!)) - p[i]!
    }
    return true
  }
}

/** F(p) − F(p + s) as the quadratic model has it. */
const predictedReduction = ({ gradient, hessian }: Quadratic, step: Float64Array): number => {
  const n = step.length
  let linear = 0
  let square = 0
  for (let i = 0; i < n; i++) {
    linear += gradient[i]! * step[i]!
    for (let j = 0; j < n; j++) square += step[i]! * hessian[i * n + j]! * step[j]!
  }
  return -linear - square / 2
}

const isTiny = (step: Float64Array, p: Float64Array, tolerance: number): boolean => {
  for (let i = 0; i < p.length; i++) if (Math.abs(step[i]!) > tolerance * Math.abs(p[i]!)) return false
  return true
}

/**
 * The minimum of `objective` in the box, from `start` (moved into the box). `objective` returns null where the
 * model can't be evaluated; the step is then shortened. It may write over `spare`, an earlier result. Null where the start can't be evaluated.
 */
export const minimise = <Q extends Quadratic>(
  objective: (p: Float64Array, spare?: Q | null) => Q | null,
  start: Float64Array,
  box: Box,
  tolerances: Tolerances,
): Minimum<Q> | null => {
  let p: Float64Array = start.map((v, i) => Math.min(box.upper[i]!, Math.max(box.lower[i]!, v)))
  let at = objective(p)
  if (!at || !Number.isFinite(at.cost)) return null
  const n = p.length
  const diagonal = new Float64Array(n)
  const step = new Float64Array(n)
  let trialPoint: Float64Array = new Float64Array(n)
  let spare: Q | null = null
  const boundedStep = boundedSteps(n, box)
  let lambda = tolerances.damping ?? 1e-3
  let growth = 2
  for (let iteration = 0; iteration < tolerances.iterations; iteration++) {
    const free = freeParameters(p, at.gradient, box)
    if (largestCosine(at, free) <= tolerances.gradient)
      return { parameters: p, at, iterations: iteration, stopped: 'gradient' }
    for (let i = 0; i < n; i++) diagonal[i] = Math.max(diagonal[i]!, at.hessian[i * n + i]!)
    if (boundedStep(p, at, free, diagonal, lambda, step)) {
      if (isTiny(step, p, tolerances.step)) return { parameters: p, at, iterations: iteration, stopped: 'step' }
      const predicted = predictedReduction(at, step)
      // An undamped step that promises no more than this need not be tried.
      if (lambda < 1e-2 && predicted >= 0 && predicted <= tolerances.relativeChange * at.cost)
        return { parameters: p, at, iterations: iteration, stopped: 'relative change' }
      for (let i = 0; i < n; i++) trialPoint[i] = p[i]! + step[i]!
      const trial: Q | null = predicted > 0 ? objective(trialPoint, spare) : null
      const gained: number = trial ? at.cost - trial.cost : -1
      const within = (share: number) => Math.abs(gained) <= share * at!.cost && predicted <= share * at!.cost
      const converged = within(tolerances.relativeChange)
      // Below the rounding of F the gradient is the better witness.
      const belowRounding = within(ROUNDING)
      if (trial && (gained >= 0 || belowRounding)) {
        const ratio = belowRounding ? 1 : gained / predicted
        lambda = Math.max(1e-12, lambda * Math.max(0.1, 1 - (2 * ratio - 1) ** 3))
        growth = 2
        const [before, resultBefore]: [Float64Array, Q] = [p, at]
        p = trialPoint
        at = trial
        trialPoint = before
        spare = resultBefore
        if (converged) return { parameters: p, at, iterations: iteration + 1, stopped: 'relative change' }
        continue
      }
      spare = trial ?? spare
      if (trial && converged) return { parameters: p, at, iterations: iteration + 1, stopped: 'relative change' }
    }
    lambda *= growth
    growth *= 2
  }
  return { parameters: p, at, iterations: tolerances.iterations, stopped: 'iterations' }
}
