/** Where the ground term changes along Δ/B. */
import { levels } from './levels.ts'
import type { Geometry } from './types.ts'

export interface Crossover {
  readonly deltaOverB: number
  /** Labels of the ground term below and above. */
  readonly from: string
  readonly to: string
}

const groundAt = (d: number, geometry: Geometry, cOverB: number, x: number): string =>
  levels(d, { geometry, deltaPerCm: x, bPerCm: 1, cPerCm: cOverB })[0]!.label

/**
 * Changes of the ground term of dⁿ for Δ/B from just above 0 to `upTo`, at a constant C/B, each to 1e-9. Changes closer
 * together than 1/400 of the range are seen as one or none.
 */
export const crossovers = (d: number, geometry: Geometry, cOverB: number, upTo: number): readonly Crossover[] => {
  const out: Crossover[] = []
  const steps = 400
  let before = groundAt(d, geometry, cOverB, upTo / 1e6)
  for (let i = 1; i <= steps; i += 1) {
    const here = groundAt(d, geometry, cOverB, (upTo * i) / steps)
    if (here === before) continue
    let low = (upTo * (i - 1)) / steps
    let high = (upTo * i) / steps
    while (high - low > 1e-10 * upTo) {
      const middle = (low + high) / 2
      if (groundAt(d, geometry, cOverB, middle) === before) low = middle
      else high = middle
    }
    out.push({ deltaOverB: (low + high) / 2, from: before, to: here })
    before = here
  }
  return out
}
