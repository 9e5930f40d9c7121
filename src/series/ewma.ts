/**
 * Exponentially weighted moving average (ISO 7870-6): z = λx + (1 − λ)z′, z₀ = μ₀; after i points the limits are
 * μ₀ ± Lσ √{λ/(2 − λ) · [1 − (1 − λ)^2i]}. Signal where z lies outside, strictly.
 */
export interface Ewma {
  readonly z: number
  /** Points taken in. */
  readonly i: number
}

export const ewmaStart = (target: number): Ewma => ({ z: target, i: 0 })

export const ewmaStep = ({ z, i }: Ewma, x: number, lambda: number): Ewma => ({
  z: lambda * x + (1 - lambda) * z,
  i: i + 1,
})

/** Half width of the limits after `i` points, in the unit of `sigma`; `i` = Infinity gives the steady limits. */
export const ewmaLimit = (i: number, sigma: number, lambda: number, l: number): number =>
  l * sigma * Math.sqrt((lambda / (2 - lambda)) * (1 - (1 - lambda) ** (2 * i)))
