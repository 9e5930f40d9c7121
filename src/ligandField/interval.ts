/**
 * Profile interval of one parameter: the values at which χ², minimised over the others, has risen by one unit. Where the
 * bands hold a parameter loosely the parabola of the covariance is a poor picture of χ², and the interval is lopsided.
 */
import { descend, type Minimum, type Problem } from './leastSquares.ts'

/** `low` or `high` is null where χ² never rises that far on that side. cm⁻¹ */
export interface Interval {
  readonly low: number | null
  readonly high: number | null
}

/** `parameter` 0, 1, 2 is Δ, B, C; `u` its uncertainty by the covariance; `rise` is 1, or the factor of a misfit. */
export const profileInterval = (
  problem: Problem,
  best: Minimum,
  parameter: 0 | 1 | 2,
  u: number,
  rise: number,
): Interval => {
  const free = problem.free.map((is, k) => is && k !== parameter)
  const fixed: Problem = { ...problem, free }
  const excess = (value: number, start: readonly number[]): readonly [number, readonly number[]] => {
    const from = [...start]
    from[parameter] = value
    if (!problem.free[2]) from[2] = problem.cOverB * from[1]!
    const { chi2, p } = descend(fixed, from)
    return [chi2 - best.chi2 - rise, p]
  }
  const side = (sign: number): number | null => {
    const centre = best.p[parameter]
    const floor = centre / 100
    let inside = centre
    let below = -rise
    let start: readonly number[] = best.p
    let reach = u
    for (let i = 0; i < 12; i += 1) {
      const outside = Math.max(floor, centre + sign * reach)
      const [above, p] = excess(outside, start)
      if (above >= 0) return root((x) => excess(x, start)[0], inside, below, outside, above)
      if (outside === floor) return null
      inside = outside
      below = above
      start = p
      reach *= 1.6
    }
    return null
  }
  return { low: side(-1), high: side(1) }
}

/** Zero of `f` between a (f below zero) and b (f above): regula falsi, the stale end's value halved (Illinois). */
const root = (f: (x: number) => number, a: number, fa: number, b: number, fb: number): number => {
  let [x0, y0, x1, y1] = [a, fa, b, fb]
  const width = Math.abs(b - a)
  for (let i = 0; i < 40; i += 1) {
    const x = (x0 * y1 - x1 * y0) / (y1 - y0)
    const y = f(x)
    if (Math.abs(y) < 1e-6 || Math.abs(x1 - x0) < 1e-9 * width) return x
    if (y > 0 === y1 > 0) y0 /= 2
    else {
      x0 = x1
      y0 = y1
    }
    x1 = x
    y1 = y
  }
  return x1
}
