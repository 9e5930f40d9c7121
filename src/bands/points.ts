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
  const [xs, ys, noises] = [wavenumberPerCm.slice(), absorbance.slice(), noise.slice()]
  let count = 0
  for (let i = 0; i < used.length; i++) {
    const x = wavenumberPerCm[i]!
    if (used[i] !== 1 || x < from || x > to || !Number.isFinite(absorbance[i]!) || !(noise[i]! > 0)) continue
    xs[count] = x
    ys[count] = absorbance[i]!
    noises[count] = noise[i]!
    count++
  }
  return weigh(xs.subarray(0, count), ys.subarray(0, count), noises.subarray(0, count), misfit)
}

const weigh = (x: Float64Array, y: Float64Array, noise: Float64Array, misfit: number): Selection => {
  const spread = weightedSpread(y, noise)
  const floor = (misfit * spread) ** 2
  const weight = new Float64Array(noise.length)
  for (let i = 0; i < weight.length; i++) weight[i] = 1 / Math.sqrt(noise[i]! * noise[i]! + floor)
  return { x, y, noise, spread, weight }
}

/** Without the points of a stretch, cm⁻¹. */
export const withoutStretch = ({ x, y, noise }: Selection, [from, to]: readonly [number, number]): Selection => {
  const isLeft = (_: number, i: number) => x[i]! < from || x[i]! > to
  return weigh(x.filter(isLeft), y.filter(isLeft), noise.filter(isLeft), 0)
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

/** Neighbours joined, weighted by their noise, to about `most` points at most: bands are broad, a first look needs no more. */
export const joinNeighbours = (points: Selection, misfit: number, most: number): Selection => {
  const count = points.x.length
  if (count <= most) return points
  const byNoise = { x: points.x, y: points.y, weight: points.noise.map((s) => 1 / s) }
  const { x, y, weight } = joined(byNoise, (points.x[count - 1]! - points.x[0]!) / most)
  return weigh(
    x,
    y,
    weight.map((w) => 1 / w),
    misfit,
  )
}

/** Means of neighbours within `spanPerCm`, weighted by 1/σ². */
export const joined = ({ x, y, weight }: Points, spanPerCm: number): Points => {
  const most = Math.min(x.length, Math.ceil((x[x.length - 1]! - x[0]!) / spanPerCm) + 1)
  const [xs, ys, weights] = [new Float64Array(most), new Float64Array(most), new Float64Array(most)]
  let count = 0
  for (let from = 0; from < x.length; count++) {
    const end = x[from]! + spanPerCm
    let [w, wx, wy] = [0, 0, 0]
    let i = from
    do {
      const one = weight[i]! * weight[i]!
      w += one
      wx += one * x[i]!
      wy += one * y[i]!
      i++
    } while (i < x.length && x[i]! < end)
    xs[count] = wx / w
    ys[count] = wy / w
    weights[count] = Math.sqrt(w)
    from = i
  }
  return { x: xs.subarray(0, count), y: ys.subarray(0, count), weight: weights.subarray(0, count) }
}
