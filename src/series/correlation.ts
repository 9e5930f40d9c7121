/**
 * Correlation between successive occasions, φ of a first-order autoregression, from squared differences over one and two
 * steps: E(xᵢ − xᵢ₋₁)² = 2σ²(1 − φ) and E(xᵢ − xᵢ₋₂)² = 2σ²(1 − φ²), so their ratio is 1 + φ. Unlike the usual
 * estimate it hardly sees a step or a slow drift, which must not be mistaken for correlation: that would widen the very
 * chart that is to find them. Simulated (normal, uncorrelated) its standard deviation is 1.45/√n.
 *
 * The variance of a mean of correlated values is (1 + φ)/(1 − φ) times that of independent ones, and by the root of
 * it σ of a chart that sums or averages is widened.
 */
export interface Successive {
  readonly n: number
  readonly last: number
  readonly beforeLast: number
  readonly oneStep: number
  readonly twoSteps: number
}

export const NO_SUCCESSION: Successive = { n: 0, last: 0, beforeLast: 0, oneStep: 0, twoSteps: 0 }

export const succeed = ({ n, last, beforeLast, oneStep, twoSteps }: Successive, x: number): Successive => ({
  n: n + 1,
  last: x,
  beforeLast: last,
  oneStep: n >= 1 ? oneStep + (x - last) ** 2 : oneStep,
  twoSteps: n >= 2 ? twoSteps + (x - beforeLast) ** 2 : twoSteps,
})

/** φ between −1 and 1; null for too few values, or values that never differ. */
export const correlationOf = ({ n, oneStep, twoSteps }: Successive): number | null =>
  n < 3 || !(oneStep > 0) ? null : Math.max(-1, Math.min(1, twoSteps / (n - 2) / (oneStep / (n - 1)) - 1))

const LEAST_VALUES = 20
/** Two standard deviations of the estimate, times √n. */
const SIGNIFICANT = 3
const LARGEST = 0.9

/** Factor by which σ is widened: 1 while a positive correlation is not significant. */
export const widening = (successive: Successive): number => {
  const phi = successive.n < LEAST_VALUES ? null : correlationOf(successive)
  if (phi === null || phi * Math.sqrt(successive.n) < SIGNIFICANT) return 1
  const bounded = Math.min(phi, LARGEST)
  return Math.sqrt((1 + bounded) / (1 - bounded))
}
