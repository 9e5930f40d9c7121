/**
 * The assignments that a term scheme allows: each observed band is one transition, one half of a split one, or no d–d
 * band. Roles are not used twice; bands follow the order that the scheme has at every Δ/B, except where two terms cross
 * (A2 and T1(P) above a T1 ground term).
 */
import type { TermScheme, Transition } from './terms.ts'

export interface Choice {
  readonly role: string
  readonly term: string
  readonly transition: Transition
  readonly half: 'a' | 'b' | null
}

export type Hypothesis = readonly (Choice | null)[]

const whole = (transition: Transition): Choice => ({
  role: transition.role,
  term: transition.label,
  transition,
  half: null,
})

/** Names of what a fourfold distortion leaves of a term: E and A2 of T1, E and B2 of T2; the halves of E keep its name. */
const halfTerm = (transition: Transition, half: 'a' | 'b'): string => {
  const { upper, label } = transition
  const term = upper[0]!
  if (!isTriple(transition)) return label
  const parity = label.includes('g') ? 'g' : ''
  const irrep = half === 'a' ? 'E' : term.irrep === 'T1' ? 'A2' : 'B2'
  return `${term.multiplicity}${irrep}${parity}(${label})`
}

const halves = (transition: Transition): readonly Choice[] =>
  (['a', 'b'] as const).map((half) => ({
    role: `${transition.role}${half}`,
    term: halfTerm(transition, half),
    transition,
    half,
  }))

const crosses = (scheme: TermScheme, a: Transition, b: Transition): boolean =>
  scheme.ground.irrep === 'T1' && [a.role, b.role].sort().join() === 'nu2,nu3'

/** Whether `next` may lie above `before`. Spin-forbidden bands may lie anywhere among the allowed, in their own order. */
const mayFollow = (scheme: TermScheme, before: Choice, next: Choice): boolean => {
  const [a, b] = [before.transition, next.transition]
  if (a === b) return areHalves(before, next)
  if (a.role.slice(0, 2) !== b.role.slice(0, 2)) return true
  return scheme.transitions.indexOf(a) < scheme.transitions.indexOf(b) || crosses(scheme, a, b)
}

/** Two halves of one term; those of an E term are alike, so the lower one is a. */
const areHalves = (before: Choice, next: Choice): boolean =>
  before.half !== null && next.half !== null && (before.half === 'a' || isTriple(before.transition))

export const isTriple = ({ upper }: Transition): boolean => upper[0]!.irrep.startsWith('T')

/** At most this many bands are called spin-forbidden beside allowed ones, and one transition is split. */
const MOST_FORBIDDEN = 2

/**
 * All assignments of `count` ascending bands. `mayBeForbidden` says which bands are faint enough (or so hinted) to be
 * tried as `sf`.
 */
export const hypotheses = (scheme: TermScheme, mayBeForbidden: readonly boolean[]): readonly Hypothesis[] => {
  const nu = scheme.transitions.filter(({ role }) => role.startsWith('nu'))
  const sf = scheme.transitions.filter(({ role }) => role.startsWith('sf'))
  const splittable = nu.filter(({ allowed, upper }) => allowed && !upper[0]!.irrep.startsWith('A'))
  const choices = [...nu.map(whole), ...splittable.slice(0, 2).flatMap(halves)]
  const forbidden = sf.map(whole)
  const out: (Choice | null)[][] = []
  const extend = (sofar: (Choice | null)[]): void => {
    const at = sofar.length
    if (at === mayBeForbidden.length) {
      if (isWhole(sofar)) out.push(sofar)
      return
    }
    extend([...sofar, null])
    const options = mayBeForbidden[at] ? [...choices, ...forbidden] : choices
    for (const option of options) if (fits(scheme, sofar, option)) extend([...sofar, option])
  }
  extend([])
  return out
}

const fits = (scheme: TermScheme, sofar: readonly (Choice | null)[], option: Choice): boolean => {
  const used = sofar.filter((choice) => choice !== null)
  if (used.some(({ role }) => role === option.role)) return false
  const isForbidden = option.role.startsWith('sf')
  if (isForbidden && used.filter(({ role }) => role.startsWith('sf')).length >= MOST_FORBIDDEN) return false
  if (option.half !== null && used.some(({ half, transition }) => half !== null && transition !== option.transition))
    return false
  return used.every((before) => mayFollow(scheme, before, option))
}

/** Halves come in pairs. */
const isWhole = (hypothesis: Hypothesis): boolean => hypothesis.filter((choice) => choice?.half != null).length !== 1
