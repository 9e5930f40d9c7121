/**
 * Which points of a spectrum enter a fit, and with what weight.
 *
 * Weights are 1/(noise² + s²): on real spectra a sum of Gaussians is off by far more than the noise (structure,
 * unequal wings), and weighting by noise alone would let the quietest stretch of the axis decide everything.
 * s is the recipe's misfit times the spread of the absorbance, so that scaling a spectrum scales s with it.
 */
import type { Spectrum } from '../spectrum/types.ts'
import type { Points } from './separable.ts'

export interface Selection extends Points {
  readonly noise: Float64Array
  /** Standard deviation of the absorbance over the points, weighted by the noise. */
  readonly spread: number
}

/** Why nothing can be done with a spectrum's arrays; null where they are in order. */
export const disorder = ({ wavenumberPerCm: x, absorbance, noise, used }: Spectrum): string | null => {
  if (absorbance.length !== x.length || noise.length !== x.length || used.length !== x.length)
    return 'its arrays differ in length'
  for (let i = 0; i < x.length; i++) {
    if (!Number.isFinite(x[i]!)) return 'an abscissa is no number'
    if (i > 0 && x[i]! === x[i - 1]!) return `two points share the abscissa ${x[i]!.toFixed(1)} cm⁻¹`
    if (i > 0 && x[i]! < x[i - 1]!) return 'abscissae do not ascend'
  }
  return null
}

/** First and last wavenumber used, cm⁻¹; null where none is. */
export const usedWindow = ({ wavenumberPerCm: x, used }: Spectrum): readonly [number, number] | null => {
  const first = used.indexOf(1)
  return first < 0 ? null : [x[first]!, x[used.lastIndexOf(1)]!]
}

export const selectPoints = (
  { wavenumberPerCm, absorbance, noise, used }: Spectrum,
  [from, to]: readonly [number, number],
  misfit: number,
): Selection => {
  const keep: number[] = []
  for (let i = 0; i < used.length; i++) {
    const x = wavenumberPerCm[i]!
    if (used[i] === 1 && x >= from && x <= to && Number.isFinite(absorbance[i]!) && noise[i]! > 0) keep.push(i)
  }
  const pick = (a: Float64Array) => Float64Array.from(keep, (i) => a[i]!)
  return weigh(pick(wavenumberPerCm), pick(absorbance), pick(noise), misfit)
}

const weigh = (x: Float64Array, y: Float64Array, noise: Float64Array, misfit: number): Selection => {
  const spread = weightedSpread(y, noise)
  const floor = (misfit * spread) ** 2
  return { x, y, noise, spread, weight: noise.map((s) => 1 / Math.sqrt(s * s + floor)) }
}

/** The same points under another misfit. */
export const reweigh = ({ x, y, noise }: Selection, misfit: number): Selection => weigh(x, y, noise, misfit)

const weightedSpread = (y: Float64Array, noise: Float64Array): number => {
  let w = 0
  let mean = 0
  let square = 0
  for (let i = 0; i < y.length; i++) {
    const wi = 1 / (noise[i]! * noise[i]!)
    const d = y[i]! - mean
    w += wi
    mean += (wi / w) * d
    square += wi * d * (y[i]! - mean)
  }
  return w > 0 ? Math.sqrt(square / w) : 0
}

/** Neighbours joined, weighted by their noise, to at most `most` points: bands are broad, a first look needs no more. */
export const joinNeighbours = (points: Selection, misfit: number, most: number): Selection => {
  const group = Math.ceil(points.x.length / most)
  if (group <= 1) return points
  const count = Math.ceil(points.x.length / group)
  const x = new Float64Array(count)
  const y = new Float64Array(count)
  const noise = new Float64Array(count)
  for (let k = 0; k < count; k++) {
    let w = 0
    for (let i = k * group; i < Math.min((k + 1) * group, points.x.length); i++) {
      const wi = 1 / points.noise[i]! ** 2
      w += wi
      x[k]! += wi * points.x[i]!
      y[k]! += wi * points.y[i]!
    }
    x[k]! /= w
    y[k]! /= w
    noise[k] = 1 / Math.sqrt(w)
  }
  return weigh(x, y, noise, misfit)
}

/** Every `step`-th point, for the first iterations. */
export const thin = ({ x, y, weight }: Points, step: number): Points => {
  const pick = (a: Float64Array) => a.filter((_, i) => i % step === 0)
  return { x: pick(x), y: pick(y), weight: pick(weight) }
}
