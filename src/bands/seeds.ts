/**
 * Where bands may be: minima of the smoothed second derivative. A Gaussian of width w and height h has curvature
 * −8 ln2 h/w² at its centre and inflections at ±w/√(8 ln2), so shoulders without a maximum of their own are seen too, and the
 * distance of the inflections tells the width.
 */
import { type LocalPolynomial, localPolynomial } from './localPolynomial.ts'
import type { Points } from './separable.ts'
import { FOUR_LN2 } from './shapes.ts'

export interface Seed {
  readonly positionPerCm: number
  readonly widthPerCm: number
  /** −curvature · w²/(8 ln2): the height that a Gaussian would have, absorbance. */
  readonly height: number
}

/** Half the stretch over which the curve is smoothed, cm⁻¹: a fraction of the narrowest band, and more for what is weak or thinly measured. */
const REACHES_PER_CM = [700, 1400] as const
/** So many looks over half a stretch. */
const LOOKS = 4
/** Curvature counts when it exceeds this many standard uncertainties. */
const SIGNIFICANT = 4
/** Widths of d–d bands at room temperature (common practice: 1500–6000 cm⁻¹), with a margin. */
export const NARROWEST_PER_CM = 1200
export const WIDEST_PER_CM = 7000
/** Seeds below this share of the strongest are structure. */
const WEAKEST = 0.03

/** Strongest first; the finer look wins where both see a band. */
export const findSeeds = (points: Points): readonly Seed[] => {
  const [fine, coarse] = REACHES_PER_CM.map((reach) => seedsAt(points, reach)) as [readonly Seed[], readonly Seed[]]
  const isNew = (seed: Seed) =>
    fine.every((other) => Math.abs(other.positionPerCm - seed.positionPerCm) > REACHES_PER_CM[1])
  const seeds = [...fine, ...coarse.filter(isNew)].sort((a, b) => b.height - a.height)
  return apart(seeds.filter((seed) => seed.height > WEAKEST * seeds[0]!.height))
}

const seedsAt = (points: Points, reachPerCm: number): readonly Seed[] => {
  const first = points.x[0]!
  const span = points.x.at(-1)! - first
  const steps = Math.ceil((LOOKS * span) / reachPerCm)
  const step = span / steps
  const at = (k: number) => first + k * step
  const curvature = Array.from({ length: steps + 1 }, (_, k) => {
    const local = localPolynomial(points, at(k), reachPerCm, 2)
    return local ? { value: (2 * local.coefficients[2]!) / reachPerCm ** 2, local } : { value: 0, local }
  })
  const u = (local: LocalPolynomial) => (2 * Math.sqrt(local.covariance()[8]!)) / reachPerCm ** 2
  const crossing = (k: number, direction: 1 | -1) => {
    let i = k
    while (i > 0 && i < steps && curvature[i]!.value < 0) i += direction
    return Math.abs(i - k) * step
  }
  return curvature.flatMap(({ value, local }, k): Seed[] => {
    const isMinimum =
      k > 0 &&
      k < steps &&
      value <= curvature[k - 1]!.value &&
      value < curvature[k + 1]!.value &&
      local !== null &&
      value < -SIGNIFICANT * u(local)
    if (!isMinimum) return []
    const half = Math.min(crossing(k, 1), crossing(k, -1))
    const widthPerCm = Math.min(WIDEST_PER_CM, Math.max(NARROWEST_PER_CM, half * Math.sqrt(2 * FOUR_LN2)))
    return [{ positionPerCm: at(k), widthPerCm, height: (-value * widthPerCm ** 2) / (2 * FOUR_LN2) }]
  })
}

/** Keeps the stronger of two seeds that are closer than the narrowest band. */
export const apart = (seeds: readonly Seed[]): readonly Seed[] => {
  const kept: Seed[] = []
  for (const seed of seeds)
    if (kept.every((other) => Math.abs(other.positionPerCm - seed.positionPerCm) >= NARROWEST_PER_CM)) kept.push(seed)
  return kept
}

/** Every choice of places that holds the hinted ones, or else the strongest; of `count` places where that is given. */
export const subsets = (
  seeds: readonly Seed[],
  hinted: number,
  count: number | undefined,
): readonly (readonly Seed[])[] => {
  const certain = seeds.slice(0, Math.min(count ?? Infinity, Math.max(1, hinted)))
  const rest = seeds.slice(certain.length)
  const choices: (readonly Seed[])[] = certain.length > 0 ? [certain] : []
  for (const seed of rest) choices.push(...choices.map((set) => [...set, seed]))
  const wanted = Math.min(count ?? Infinity, seeds.length)
  return count === undefined ? choices : choices.filter((set) => set.length === wanted)
}
