/**
 * Where the curves of a series cross. One species that turns into another leaves isosbestic points: places that all curves run through.
 * Crossings of neighbours in the series that wander tell of a third species, of a lost one, or of a shifting baseline.
 */
import type { Spectrum } from '../spectrum/types.ts'
import { derivative, localPolynomial } from './localPolynomial.ts'
import { selectPoints } from './points.ts'
import type { Points } from './separable.ts'

export interface Crossing {
  readonly positionPerCm: number
  readonly uPositionPerCm: number
  /** Index of the earlier of the two spectra. */
  readonly pair: number
}

/** Crossings of neighbours that belong together. */
export interface CrossingPlace {
  readonly crossings: readonly Crossing[]
  readonly fromPerCm: number
  readonly toPerCm: number
  /** All within what noise explains: an isosbestic point. */
  readonly holds: boolean
}

/** Half the stretch over which a difference is smoothed, cm⁻¹. */
const REACH_PER_CM = 300
/** The difference counts as crossing zero where on both sides it exceeds this many standard uncertainties. */
const SIGNIFICANT = 4
/** Crossings of neighbouring pairs farther apart than this are not the same. cm⁻¹ */
const APART_PER_CM = 1200
/** χ²/ν of positions from which they are said to wander. */
const WANDERS = 4

/** Crossings of each spectrum with the next, within the window all share, by place; strongest-held places have a crossing of every pair. */
export const crossingPlaces = (spectra: readonly Spectrum[]): readonly CrossingPlace[] => {
  const all = spectra.slice(1).flatMap((later, pair) => crossingsOf(spectra[pair]!, later, pair))
  const chains: Crossing[][] = []
  for (const crossing of all.toSorted((a, b) => a.pair - b.pair)) {
    const distance = (chain: readonly Crossing[]) => Math.abs(chain.at(-1)!.positionPerCm - crossing.positionPerCm)
    const open = chains.filter((chain) => chain.at(-1)!.pair < crossing.pair && distance(chain) < APART_PER_CM)
    const nearest = open.toSorted((a, b) => distance(a) - distance(b))[0]
    if (nearest) nearest.push(crossing)
    else chains.push([crossing])
  }
  return chains.filter((chain) => 2 * chain.length > spectra.length - 1).map(placeOf)
}

const placeOf = (crossings: readonly Crossing[]): CrossingPlace => {
  const positions = crossings.map(({ positionPerCm }) => positionPerCm)
  const weights = crossings.map(({ uPositionPerCm }) => 1 / uPositionPerCm ** 2)
  const total = weights.reduce((sum, w) => sum + w, 0)
  const mean = positions.reduce((sum, p, i) => sum + weights[i]! * p, 0) / total
  const chi2 = positions.reduce((sum, p, i) => sum + weights[i]! * (p - mean) ** 2, 0)
  return {
    crossings,
    fromPerCm: Math.min(...positions),
    toPerCm: Math.max(...positions),
    holds: chi2 <= WANDERS * Math.max(1, crossings.length - 1),
  }
}

const crossingsOf = (earlier: Spectrum, later: Spectrum, pair: number): readonly Crossing[] => {
  const points = difference(earlier, later)
  if (points === null) return []
  const [first, last] = [points.x[0]!, points.x.at(-1)!]
  const places = Array.from(
    { length: Math.floor((last - first) / REACH_PER_CM) + 1 },
    (_, k) => first + k * REACH_PER_CM,
  )
  const seen = places.flatMap((at) => {
    const local = localPolynomial(points, at, REACH_PER_CM, 1)
    if (!local) return []
    const value = local.coefficients[0]!
    const u = Math.sqrt(local.covariance()[0]!)
    return Math.abs(value) > SIGNIFICANT * u ? [{ at, sign: Math.sign(value) }] : []
  })
  return seen.slice(1).flatMap(({ at, sign }, k) => {
    const before = seen[k]!
    return sign === before.sign ? [] : (crossingAt(points, (before.at + at) / 2, at - before.at, pair) ?? [])
  })
}

const crossingAt = (points: Points, near: number, gap: number, pair: number): Crossing | null => {
  let at = near
  for (let round = 0; round < 6; round++) {
    const local = localPolynomial(points, at, Math.max(2 * REACH_PER_CM, gap), 2)
    if (!local) return null
    const reach = Math.max(2 * REACH_PER_CM, gap)
    const slope = derivative(local.coefficients, 0, 1) / reach
    if (slope === 0) return null
    const step = -local.coefficients[0]! / slope
    at += Math.max(-gap, Math.min(gap, step))
    if (Math.abs(step) < 1)
      return { positionPerCm: at, uPositionPerCm: Math.sqrt(local.covariance()[0]!) / Math.abs(slope), pair }
  }
  return null
}

/** Later less earlier on the axis of the earlier, weighted by the noise of both; null where they share too little. */
const difference = (earlier: Spectrum, later: Spectrum): Points | null => {
  const whole: readonly [number, number] = [0, Infinity]
  const [a, b] = [selectPoints(earlier, whole, 0), selectPoints(later, whole, 0)]
  if (a.x.length === 0 || b.x.length < 2) return null
  const [from, to] = [b.x[0]!, b.x.at(-1)!]
  const kept: (readonly [number, number, number])[] = []
  let k = 0
  for (let i = 0; i < a.x.length; i++) {
    const x = a.x[i]!
    if (x < from || x > to) continue
    while (k + 2 < b.x.length && b.x[k + 1]! < x) k++
    const part = (x - b.x[k]!) / (b.x[k + 1]! - b.x[k]!)
    const value = b.y[k]! + part * (b.y[k + 1]! - b.y[k]!)
    const noise = Math.hypot(a.noise[i]!, b.noise[k]!)
    kept.push([x, value - a.y[i]!, 1 / noise])
  }
  const column = (j: 0 | 1 | 2) => Float64Array.from(kept, (row) => row[j])
  return kept.length < 20 ? null : { x: column(0), y: column(1), weight: column(2) }
}
