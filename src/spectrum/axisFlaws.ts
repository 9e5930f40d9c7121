/** Flaws along the axis that are said but change nothing: places where points are missing, a step where the lamp changes. */
import { median, usedPlaces } from './noise.ts'

/** Indices i with a hole between i and i + 1: more than 2.5 times the wider of the usual spacings on either side. */
export const findGaps = (x: Float64Array): readonly number[] => {
  const n = x.length
  const gaps: number[] = []
  const spacing = new Float64Array(Math.max(0, n - 1))
  for (let i = 0; i < n - 1; i++) spacing[i] = Math.abs(x[i + 1]! - x[i]!)
  for (let i = 0; i < spacing.length; i++) {
    // no median of the neighbours is less than the least of them
    let least = Infinity
    for (let k = Math.max(0, i - 5); k < Math.min(spacing.length, i + 6); k++)
      if (k !== i) least = Math.min(least, spacing[k]!)
    if (!(spacing[i]! > 2.5 * least)) continue
    const near = [spacing.slice(Math.max(0, i - 5), i), spacing.slice(i + 1, i + 6)].filter((side) => side.length >= 2)
    if (near.length === 0) continue
    if (spacing[i]! > 2.5 * Math.max(...near.map(median))) gaps.push(i)
  }
  return gaps
}

/**
 * Indices i with a step between i and i + 1: straight lines through five points on each side miss each other halfway by
 * more than eight standard deviations, more than 0.002, and more than six times what the curve does at any place near by.
 */
export const findSteps = (
  x: Float64Array,
  y: Float64Array,
  used: Uint8Array,
  noise: Float64Array,
): readonly number[] => {
  const index = usedPlaces(used)
  const jump = new Float64Array(index.length)
  for (let k = 4; k < index.length - 5; k++) {
    const middle = (x[index[k]!]! + x[index[k + 1]!]!) / 2
    jump[k] = Math.abs(lineAt(x, y, index, middle, k - 4, k + 1) - lineAt(x, y, index, middle, k + 1, k + 6))
  }
  const largestIn = (from: number, to: number): number => {
    let largest = 0
    for (let k = from; k < to; k++) largest = Math.max(largest, jump[k]!)
    return largest
  }
  const steps: number[] = []
  for (let k = 4; k < index.length - 5; k++) {
    const i = index[k]!
    if (!(jump[k]! > 8 * 1.05 * noise[i]! && jump[k]! > 0.002)) continue
    const direct = Math.abs(y[index[k + 1]!]! - y[i]!)
    if (direct < 0.6 * jump[k]! || jump[k]! < largestIn(Math.max(0, k - 5), k + 6)) continue
    // a step spreads over five places on either side of itself; beyond them is the curve's own bend
    const below = [Math.max(4, k - 15), Math.max(4, k - 5)] as const
    const above = [Math.min(index.length - 5, k + 6), Math.min(index.length - 5, k + 16)] as const
    if (below[1] - below[0] + above[1] - above[0] < 5) continue
    if (jump[k]! > 6 * Math.max(largestIn(...below), largestIn(...above))) steps.push(i)
  }
  return steps
}

/** Straight line by least squares through the points `from` (included) to `to` (not) of `index`, at one abscissa. */
export const lineAt = (
  x: Float64Array,
  y: Float64Array,
  index: ArrayLike<number>,
  at: number,
  from = 0,
  to = index.length,
): number => {
  let mx = 0
  let my = 0
  for (let k = from; k < to; k++) {
    mx += x[index[k]!]! / (to - from)
    my += y[index[k]!]! / (to - from)
  }
  let sxx = 0
  let sxy = 0
  for (let k = from; k < to; k++) {
    const dx = x[index[k]!]! - mx
    sxx += dx * dx
    sxy += dx * (y[index[k]!]! - my)
  }
  return my + (sxy / sxx) * (at - mx)
}
