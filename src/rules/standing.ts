import type { Window } from '../series/types.ts'
import type { Outcome } from './types.ts'

/**
 * The rules that are always there.
 *
 * `not-this-species` compares where the bands are with where the species has them. Each expected band that was found
 * is off by d = (ν̃ − ν̃ expected) / within; the spectrum is far from its species when the root mean square of d over
 * the bands found exceeds FAR, and near again below NEAR. A band counts as found when it has a position and stands
 * clear of its own uncertainty and of the noise. None found: the spectrum is blank, which is far. A band that is
 * lost while another stands in its place is no other species, it is for the rules on bands to tell.
 */
const FAR = 3
const NEAR = 2
/** Height over its uncertainty, and over the noise, below which a band is not there. */
const DETECTED_OVER_U = 3
const DETECTED_OVER_NOISE = 5

const NOT_TOLD: Outcome = { kind: 'undecided', because: 'gathering', what: 'nothing is known of the fit' }

/** Rings when the spectrum could not be fitted, or a rule stayed undecided for another reason than gathering. */
export const judgeUnjudged = ({ standing }: Window): Outcome => {
  if (standing === undefined) return NOT_TOLD
  return standing.fit !== 'fitted' || standing.undecided.length > 0 ? { kind: 'rings' } : { kind: 'clears' }
}

/** Rings when the spectrum does not look like its species at all: blank, swapped sample. */
export const judgeSpecies = (window: Window): Outcome => {
  const { standing } = window
  const occasion = window.occasions.at(-1)
  if (standing === undefined || occasion === undefined) return NOT_TOLD
  if (standing.fit === 'no-band') return { kind: 'rings' }
  if (standing.fit === 'unfitted')
    return { kind: 'undecided', because: 'missing', what: 'the spectrum could not be fitted' }
  const value = (name: string) => occasion.values[name] ?? null
  const isThere = (role: string): boolean => {
    if (value(role) === null) return false
    const height = value(role.replace('nu', 'height'))
    if (height === null) return true
    const u = occasion.u[role.replace('nu', 'height')] ?? 0
    return height > DETECTED_OVER_U * u && height > DETECTED_OVER_NOISE * (value('noise') ?? 0)
  }
  if (standing.expected.length === 0)
    return ['nu1', 'nu2', 'nu3', 'nu4', 'nu5', 'nu6'].some(isThere) ? { kind: 'clears' } : { kind: 'rings' }
  const off = standing.expected
    .filter(({ role }) => isThere(role))
    .map(({ role, nearPerCm, withinPerCm }) => (value(role)! - nearPerCm) / withinPerCm)
  const far = off.length === 0 ? Infinity : Math.sqrt(off.reduce((sum, d) => sum + d * d, 0) / off.length)
  if (far > FAR) return { kind: 'rings' }
  return far < NEAR ? { kind: 'clears' } : { kind: 'holds' }
}
