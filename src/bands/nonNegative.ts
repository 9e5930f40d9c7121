/** The linear part of a fit, from its normal equations. */
import { type Cholesky, cholesky, gathered, roomFor, solveInPlace, submatrix } from './symmetric.ts'

interface Linear {
  readonly active: readonly number[]
  /** Of the Gram matrix over what is active. */
  readonly factor: Cholesky
}

/**
 * Least squares with some coefficients ≥ 0 (Lawson & Hanson 1974, ch. 23, by dropping from the full set and letting back in). A solver
 * for m coefficients, which are written into its last argument.
 */
export const nonNegative = (m: number) => {
  const room = roomFor(m)
  const part = new Float64Array(m * m)
  const solution = new Float64Array(m)
  return (
    gram: Float64Array,
    right: Float64Array,
    signed: readonly boolean[],
    coefficients: Float64Array,
  ): Linear | null => {
    let active: readonly number[] = indicesWhere(m, (i) => gram[i * m + i]! > 0)
    for (let round = 0; round < 3 * m; round++) {
      const factor = cholesky(submatrix(gram, m, active, part), active.length, 1e-13, room)
      if (!factor) {
        // Two columns tell the same: let go of the last one that may be zero.
        const last = active.findLast((i) => !signed[i]) ?? active.at(-1)
        if (last === undefined) return null
        active = active.filter((i) => i !== last)
        continue
      }
      solveInPlace(factor, gathered(right, active, solution))
      const worst = mostNegative(solution, active, signed)
      if (worst !== null) {
        active = active.filter((i) => i !== worst)
        continue
      }
      coefficients.fill(0)
      for (let k = 0; k < active.length; k++) coefficients[active[k]!] = solution[k]!
      const back = round > m ? null : letBack(gram, right, coefficients, active)
      if (back === null) return { active, factor }
      active = [...active, back].sort((a, b) => a - b)
    }
    return null
  }
}

const indicesWhere = (count: number, holds: (i: number) => boolean): readonly number[] => {
  const indices: number[] = []
  for (let i = 0; i < count; i++) if (holds(i)) indices.push(i)
  return indices
}

/** The coefficient farthest below zero of those that must not be. */
const mostNegative = (solution: Float64Array, active: readonly number[], signed: readonly boolean[]): number | null => {
  let worst: number | null = null
  let least = 0
  for (let k = 0; k < active.length; k++) {
    if (signed[active[k]!] || solution[k]! >= least) continue
    least = solution[k]!
    worst = active[k]!
  }
  return worst
}

/** A coefficient held at zero that would lower the sum of squares by rising. */
const letBack = (
  gram: Float64Array,
  right: Float64Array,
  coefficients: Float64Array,
  active: readonly number[],
): number | null => {
  const m = right.length
  for (let i = 0; i < m && active.length < m; i++) {
    if (active.includes(i) || !(gram[i * m + i]! > 0)) continue
    let pull = right[i]!
    for (let j = 0; j < m; j++) pull -= gram[i * m + j]! * coefficients[j]!
    if (pull > 1e-9 * Math.abs(right[i]!)) return i
  }
  return null
}
