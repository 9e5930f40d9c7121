/**
 * Shewhart chart of individual values, standardised: z = (x − target)/σ.
 *
 * Western Electric: (1) one point beyond 3σ; (2) two of three beyond 2σ on one side; (3) four of five beyond 1σ on one
 * side; (4) eight in a row on one side. L. S. Nelson, J. Quality Technology 16 (1984) 237: (1) one beyond 3σ; (2) nine
 * in a row on one side; (3) six in a row steadily rising or falling; (4) fourteen in a row alternating; (5) two of three
 * beyond 2σ on one side; (6) four of five beyond 1σ on one side; (7) fifteen in a row within 1σ; (8) eight in a row
 * with none within 1σ, both sides present. Six rising points are five rises.
 */

/** Looks at the newest points only: whether the pattern is complete at the last of `z`. */
type Test = (z: readonly number[]) => boolean

const newest = (z: readonly number[], n: number): readonly number[] | null => (z.length < n ? null : z.slice(-n))
const every =
  (n: number, holds: (x: number, i: number, all: readonly number[]) => boolean): Test =>
  (z) =>
    newest(z, n)?.every(holds) ?? false

const beyond = (limit: number): Test => every(1, (x) => Math.abs(x) > limit)
/** `m` of the newest `n` beyond the limit on one side; fewer than `n` points may do. */
const someBeyond =
  (m: number, n: number, limit: number): Test =>
  (z) => {
    const last = z.slice(-n)
    return last.filter((x) => x > limit).length >= m || last.filter((x) => x < -limit).length >= m
  }
const oneSide =
  (n: number): Test =>
  (z) => {
    const last = newest(z, n)
    return last !== null && (last.every((x) => x > 0) || last.every((x) => x < 0))
  }
const steady =
  (n: number): Test =>
  (z) => {
    const last = newest(z, n)
    if (last === null) return false
    const rises = last.slice(1).map((x, i) => x - last[i]!)
    return rises.every((d) => d > 0) || rises.every((d) => d < 0)
  }
const alternating = (n: number): Test =>
  every(n, (x, i, all) => i < 2 || (x - all[i - 1]!) * (all[i - 1]! - all[i - 2]!) < 0)
const outsideBothSides =
  (n: number): Test =>
  (z) => {
    const last = newest(z, n)
    return (last?.every((x) => Math.abs(x) > 1) && last.some((x) => x > 0) && last.some((x) => x < 0)) ?? false
  }

export const SHEWHART_TESTS: ReadonlyMap<string, Test> = new Map([
  ['western-electric-1', beyond(3)],
  ['western-electric-2', someBeyond(2, 3, 2)],
  ['western-electric-3', someBeyond(4, 5, 1)],
  ['western-electric-4', oneSide(8)],
  ['nelson-1', beyond(3)],
  ['nelson-2', oneSide(9)],
  ['nelson-3', steady(6)],
  ['nelson-4', alternating(14)],
  ['nelson-5', someBeyond(2, 3, 2)],
  ['nelson-6', someBeyond(4, 5, 1)],
  ['nelson-7', every(15, (x) => Math.abs(x) < 1)],
  ['nelson-8', outsideBothSides(8)],
])

/** Points that the longest test looks back over. */
export const SHEWHART_MEMORY = 15

/** Names of the tests that signal at the newest of the standardised values `z`. Unknown names never signal. */
export const shewhartSignals = (z: readonly number[], tests: readonly string[]): readonly string[] =>
  tests.filter((name) => SHEWHART_TESTS.get(name)?.(z) ?? false)
