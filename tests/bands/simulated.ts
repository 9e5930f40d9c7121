/** Made-up spectra with known truth, and a seeded generator of noise (mulberry32; Box and Muller 1958). */
import type { Spectrum } from '../../src/spectrum/types.ts'

export interface Truth {
  /** Position, full width at half maximum (cm⁻¹), height. */
  readonly bands: readonly (readonly [number, number, number])[]
  readonly constant: number
  /** Scatter at 550 nm; grows as ν̃⁴. */
  readonly scatter: number
  /** A charge-transfer band beyond the window. */
  readonly flank?: readonly [number, number, number]
}

export const generator = (seed: number): (() => number) => {
  let state = seed >>> 0
  return () => {
    state = (state + 0x6d2b79f5) >>> 0
    let t = state
    t = Math.imul(t ^ (t >>> 15), t | 1)
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61)
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
}

export const gaussianNoise = (random: () => number) => (): number =>
  Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random())

export const curveOf =
  ({ bands, constant, scatter, flank }: Truth) =>
  (x: number): number =>
    [...bands, ...(flank ? [flank] : [])].reduce(
      (sum, [p, w, h]) => sum + h * Math.exp(-4 * Math.LN2 * ((x - p) / w) ** 2),
      constant + scatter * (x / 18182) ** 4,
    )

/** 601 points from 300 to 900 nm unless told otherwise. */
export const simulate = (
  truth: Truth | ((x: number) => number),
  noise: number,
  normal: () => number,
  [fromNm, toNm, stepNm]: readonly [number, number, number] = [300, 900, 1],
): Spectrum => {
  const curve = typeof truth === 'function' ? truth : curveOf(truth)
  const count = Math.round((toNm - fromNm) / stepNm) + 1
  const x = Float64Array.from({ length: count }, (_, i) => 1e7 / (toNm - i * stepNm))
  return {
    wavenumberPerCm: x,
    absorbance: x.map((v) => curve(v) + noise * normal()),
    noise: new Float64Array(count).fill(noise > 0 ? noise : 1e-6),
    used: new Uint8Array(count).fill(1),
    ordinate: 'absorbance',
    medium: 'vacuum',
    pathMm: 10,
    flags: [],
    remarks: [],
  }
}
