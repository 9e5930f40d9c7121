/** Flaws along the axis that are said but change nothing: places where points are missing, a step where the lamp changes. */
import { median } from './noise.ts'

/** Indices i with a hole between i and i + 1: more than 2.5 times the wider of the usual spacings on either side. */
export const findGaps = (x: Float64Array): readonly number[] => {
  const n = x.length
  const gaps: number[] = []
  const spacing = new Float64Array(Math.max(0, n - 1))
  for (let i = 0; i < n - 1; i++) spacing[i] = Math.abs(x[i + 1]! - x[i]!)
  for (let i = 0; i < spacing.length; i++) {
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
  const index = [...used.keys()].filter((i) => used[i] === 1)
  const jump = new Float64Array(index.length)
  for (let k = 4; k < index.length - 5; k++) {
    const middle = (x[index[k]!]! + x[index[k + 1]!]!) / 2
    jump[k] = Math.abs(
      lineAt(x, y, index.slice(k - 4, k + 1), middle) - lineAt(x, y, index.slice(k + 1, k + 6), middle),
    )
  }
  const steps: number[] = []
  for (let k = 4; k < index.length - 5; k++) {
    const i = index[k]!
    // a step spreads over five places on either side of itself; beyond them is the curve's own bend
    const around = [
      ...jump.slice(Math.max(4, k - 15), Math.max(4, k - 5)),
      ...jump.slice(k + 6, Math.min(index.length - 5, k + 16)),
    ]
    if (around.length < 5) continue
    const largest = Math.max(...jump.slice(Math.max(0, k - 5), k + 6))
    const direct = Math.abs(y[index[k + 1]!]! - y[i]!)
    if (jump[k]! < largest || direct < 0.6 * jump[k]!) continue
    if (jump[k]! > 8 * 1.05 * noise[i]! && jump[k]! > 0.002 && jump[k]! > 6 * Math.max(...around)) steps.push(i)
  }
  return steps
}

/** Straight line by least squares through these points, at one abscissa. */
export const lineAt = (x: Float64Array, y: Float64Array, index: readonly number[], at: number): number => {
  const mx = index.reduce((sum, i) => sum + x[i]!, 0) / index.length
  const my = index.reduce((sum, i) => sum + y[i]!, 0) / index.length
  let sxx = 0
  let sxy = 0
  for (const i of index) {
    sxx += (x[i]! - mx) ** 2
    sxy += (x[i]! - mx) * (y[i]! - my)
  }
  return my + (sxy / sxx) * (at - mx)
}
