/**
 * Tabular CUSUM (ISO 7870-4; Montgomery, Introduction to Statistical Quality Control):
 * C⁺ = max(0, x − (μ₀ + K) + C⁺′), C⁻ = max(0, (μ₀ − K) − x + C⁻′), K = kσ, signal where C > H = hσ, strictly.
 * N⁺, N⁻ count the points since the sum last was zero: the shift began before the first of them.
 */
export interface Cusum {
  readonly high: number
  readonly low: number
  readonly nHigh: number
  readonly nLow: number
}

export const CUSUM_START: Cusum = { high: 0, low: 0, nHigh: 0, nLow: 0 }

/** One point further. `x`, `target` and `slack` = K in one unit; the sums are in it too. */
export const cusumStep = (before: Cusum, x: number, target: number, slack: number): Cusum => {
  const high = Math.max(0, x - (target + slack) + before.high)
  const low = Math.max(0, target - slack - x + before.low)
  return { high, low, nHigh: high > 0 ? before.nHigh + 1 : 0, nLow: low > 0 ? before.nLow + 1 : 0 }
}

export const cusumSignals = ({ high, low }: Cusum, limit: number): boolean => high > limit || low > limit

/** Estimate of the mean after a shift, from the side whose sum is the larger; null while both sums are zero. */
export const cusumNewMean = ({ high, low, nHigh, nLow }: Cusum, target: number, slack: number): number | null => {
  if (high > 0 && high >= low) return target + slack + high / nHigh
  return low > 0 ? target - slack - low / nLow : null
}
