/**
 * Which transition a role names. Roles follow the term, never the rank: `nu2` stays `nu2` past a crossing. The holes of
 * a tetrahedral field are the electrons of an octahedral one, dⁿ(Td) = d¹⁰⁻ⁿ(Oh), so one table serves both.
 */
import { parityOf } from './field.ts'
import type { Geometry, Ion, Spin } from './types.ts'

export interface Term {
  readonly multiplicity: number
  /** Without g. */
  readonly irrep: string
  /** Root of (multiplicity, irrep), from 1. */
  readonly index: number
  /** Term of the free ion that it comes from, where the name of the transition says so: `F`, `P`, `D`. */
  readonly parent?: string
}

export interface Transition {
  readonly role: string
  /** Upper terms that lie under the one band. */
  readonly upper: readonly Term[]
  /** `4T2g`, `4A1g + 4Eg`, `4T1g(P)`; `1A1g(2)` for a second root without a name. */
  readonly label: string
  /** From the ground term without change of spin. */
  readonly allowed: boolean
}

export interface TermScheme {
  readonly d: number
  readonly geometry: Geometry
  /** Null where only one spin state exists. */
  readonly spin: Spin | null
  readonly ground: Term
  /** `4A2g` */
  readonly groundLabel: string
  readonly transitions: readonly Transition[]
  /** A ground term that lower symmetry must split (d1, d4, d9 as the contract flags them). */
  readonly jahnTeller: boolean
}

/** Upper terms as `T1`, `T1 2 P` (second root, from the P term), `A1 + E`. */
type Row = readonly [ground: string, unpaired: number, upper: readonly string[], forbidden: readonly string[]]

const A2_GROUND = ['T2', 'T1 1 F', 'T1 2 P']
const T1_GROUND = ['T2', 'A2', 'T1 2 P']

/** By the number of d electrons of the octahedral complex, high spin. Forbidden: one unpaired pair less. */
const HIGH: Readonly<Record<number, Row>> = {
  1: ['T2', 1, ['E'], []],
  2: ['T1', 2, T1_GROUND, ['T2', 'E', 'A1', 'A1 2']],
  3: ['A2', 3, A2_GROUND, ['E', 'T1', 'T2', 'A1']],
  4: ['E', 4, ['T2'], ['T1']],
  5: ['A1', 5, ['T1', 'T2', 'A1 + E', 'T2 2 D', 'E 2 D', 'T1 2 P'], []],
  6: ['T2', 4, ['E'], ['T1']],
  7: ['T1', 3, T1_GROUND, ['E', 'T1', 'T2', 'A1']],
  8: ['A2', 2, A2_GROUND, ['E', 'T2', 'A1', 'T1']],
  9: ['E', 1, ['T2'], []],
}

const LOW: Readonly<Record<number, Row>> = {
  6: ['A1', 0, ['T1', 'T2'], ['T1', 'T2']],
}

const termOf = (text: string, multiplicity: number): Term => {
  const [irrep, index, parent] = text.split(' ')
  return { multiplicity, irrep: irrep!, index: Number(index ?? 1), ...(parent === undefined ? {} : { parent }) }
}

const sayTerm = ({ multiplicity, irrep, index, parent }: Term, parity: string): string =>
  `${multiplicity}${irrep}${parity}${parent === undefined ? (index === 1 ? '' : `(${index})`) : `(${parent})`}`

/** High or low, where an octahedral complex of dⁿ can be both. */
export const hasTwoSpins = (d: number, geometry: Geometry): boolean => geometry === 'octahedral' && d >= 4 && d <= 7

/** The spin meant when none was given: what complexes of the ion usually are. Null where only one exists. */
export const usualSpin = (ion: Ion, geometry: Geometry): Spin | null => {
  if (!hasTwoSpins(ion.d, geometry)) return null
  return ion.usualSpin ?? 'high'
}

const build = (d: number, geometry: Geometry, spin: Spin | null): TermScheme | null => {
  const low = spin === 'low' && hasTwoSpins(d, geometry)
  const row = (low ? LOW : HIGH)[geometry === 'tetrahedral' ? 10 - d : d]
  if (row === undefined || (spin === 'low' && geometry === 'tetrahedral' && d >= 3 && d <= 6)) return null
  const [ground, unpaired, upper, forbidden] = row
  const parity = parityOf(geometry)
  const multiplicity = unpaired + 1
  const allSpinForbidden = unpaired === 5
  const transition = (text: string, role: string, spinOf: number, allowed: boolean): Transition => {
    const terms = text.split(' + ').map((one) => termOf(one, spinOf))
    return { role, upper: terms, label: terms.map((term) => sayTerm(term, parity)).join(' + '), allowed }
  }
  const nu = upper.map((text, i) =>
    transition(text, `nu${i + 1}`, allSpinForbidden ? multiplicity - 2 : multiplicity, !allSpinForbidden),
  )
  const otherSpin = low ? multiplicity + 2 : multiplicity - 2
  const sf = forbidden.map((text, i) => transition(text, `sf${i + 1}`, otherSpin, false))
  const groundTerm = termOf(ground, multiplicity)
  return {
    d,
    geometry,
    spin: hasTwoSpins(d, geometry) ? (low ? 'low' : 'high') : null,
    ground: groundTerm,
    groundLabel: sayTerm(groundTerm, parity),
    transitions: [...nu, ...sf],
    jahnTeller: d === 1 || d === 9 || (d === 4 && !low),
  }
}

const known = new Map<string, TermScheme | null>()

/**
 * Ground term and transitions of dⁿ; null where the room has no table of roles (low-spin d4, d5, d7, tetrahedral low
 * spin). `spin` only matters where both states exist, and then null means high.
 */
export const termScheme = (d: number, geometry: Geometry, spin: Spin | null): TermScheme | null => {
  const key = `${d} ${geometry} ${spin}`
  const found = known.get(key)
  if (found !== undefined) return found
  const made = d >= 1 && d <= 9 ? build(d, geometry, spin) : null
  known.set(key, made)
  return made
}
