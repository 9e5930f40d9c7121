/**
 * What a change of the bands may mean, by simple tests in a fixed order, each at three standard uncertainties:
 *
 *   product       d_i = s·p_i: the movements d of the bands point to a product's bands p away; s is the part of the way
 *   wavelength    every band moved by one and the same number of nm
 *   concentration no band moved and all heights changed by one factor
 *
 * s, the common shift and the common factor are weighted means; whether they describe all bands is a χ² test at 1 %.
 * In a mixture the apparent band does not move along p exactly, because the product's bands have other heights: each
 * p_i is taken as known to a quarter. No probabilities are worked out: where two readings fit, the answer is `unclear`.
 */
import type { Species } from '../config/types.ts'
import { checksFor } from './checks.ts'

export interface BandState {
  /** Vacuum wavenumber. */
  readonly positionPerCm: number
  readonly uPositionPerCm: number | null
  /** Absorbance at one path; null where unknown. */
  readonly height: number | null
  readonly uHeight: number | null
}

export interface ObservedChange {
  readonly species: Species | null
  /** By role: the reference. */
  readonly before: Readonly<Record<string, BandState>>
  readonly now: Readonly<Record<string, BandState>>
}

export interface Interpretation {
  /** A word of the contract's list. */
  readonly diagnosis: string
  /** Posterior probability; null as long as none is worked out. */
  readonly confidence: number | null
  readonly meaning: string
  /** What to check first, in order. */
  readonly check: readonly string[]
}

/** A number with its standard uncertainty. */
type Measured = readonly [value: number, u: number]

/** How far the direction to a product is known, as a part of itself. */
const U_DIRECTION = 0.25
/** Significance in standard uncertainties. */
const CLEARLY = 3
/** Upper 1 % points of χ² for 1 to 6 degrees of freedom (any table). */
const CHI2_99 = [6.635, 9.21, 11.345, 13.277, 15.086, 16.812]

export const interpretChange = (change: ObservedChange): Interpretation => {
  const roles = Object.keys(change.before).filter((role) => change.now[role] !== undefined)
  const readings = [
    ...productReadings(change, roles),
    ...wavelengthReading(change, roles),
    ...concentrationReading(change, roles),
  ]
  const only = readings[0]
  const diagnosis = only !== undefined && readings.length === 1 ? only.diagnosis : 'unclear'
  return {
    diagnosis,
    confidence: null,
    meaning: [movementsOf(change, roles), verdictOf(readings, roles)].filter((sentence) => sentence !== '').join(' '),
    check: checksFor(change.species, diagnosis),
  }
}

interface Reading {
  readonly diagnosis: string
  readonly evidence: string
}

const verdictOf = (readings: readonly Reading[], roles: readonly string[]): string => {
  if (readings.length === 1) return readings[0]!.evidence
  if (readings.length > 1)
    return `Several readings fit, and these bands do not tell them apart. ${readings.map(({ evidence }) => evidence).join(' Or: ')}`
  if (roles.length < 2) return 'One band alone does not tell what happened.'
  return 'This fits neither a known product, nor a shift of the wavelength axis, nor a change of concentration.'
}

const movementOf = ({ before, now }: ObservedChange, role: string): Measured | null => {
  const [from, to] = [before[role]!, now[role]!]
  if (from.uPositionPerCm === null || to.uPositionPerCm === null) return null
  return [to.positionPerCm - from.positionPerCm, Math.hypot(from.uPositionPerCm, to.uPositionPerCm)]
}

const isClear = ([value, u]: Measured): boolean => Math.abs(value) > CLEARLY * u

/** Weighted mean of numbers that should be one; null where they are not (χ² at 1 %) or fewer than two. */
const commonOf = (values: readonly Measured[]): Measured | null => {
  if (values.length < 2 || values.some(([, u]) => !(u > 0))) return null
  const weight = values.reduce((sum, [, u]) => sum + u ** -2, 0)
  const mean = values.reduce((sum, [value, u]) => sum + value * u ** -2, 0) / weight
  const chi2 = values.reduce((sum, [value, u]) => sum + ((value - mean) / u) ** 2, 0)
  const limit = CHI2_99[Math.min(values.length - 1, CHI2_99.length) - 1]!
  return chi2 <= limit ? [mean, 1 / Math.sqrt(weight)] : null
}

/** What could be measured, role by role; where it could not, the role is left out. */
const measuredOf = <T>(roles: readonly string[], measure: (role: string) => T | null): readonly T[] =>
  roles.map(measure).filter((one) => one !== null)

const productReadings = (change: ObservedChange, roles: readonly string[]): readonly Reading[] => {
  const { species, before } = change
  return (species?.mayBecome ?? []).flatMap(({ ligands, cause, nearPerCm }) => {
    const named = roles.filter((role) => nearPerCm[role] !== undefined)
    const moves = named.map((role) => movementOf(change, role))
    if (named.length < 2 || moves.some((move) => move === null)) return []
    const shares = named.map((role, i): Measured => {
      const way = nearPerCm[role]! - before[role]!.positionPerCm
      const [moved, u] = moves[i]!
      const share = moved / way
      return [share, Math.hypot(u / way, U_DIRECTION * share)]
    })
    const share = commonOf(shares)
    if (share === null || share[0] <= 0 || share[0] > 1.5 || !moves.every((move) => isClear(move!))) return []
    const product = Object.entries(ligands)
      .map(([ligand, n]) => `${n} ${ligand}`)
      .join(', ')
    const bands = named.map((role) => `${sayRole(role)} ${Math.round(nearPerCm[role]!)} cm⁻¹`).join(', ')
    return [
      {
        diagnosis: cause,
        evidence: `All bands move towards those of the product with ${product} (${bands}), by about ${sayPercent(share)} of the way.`,
      },
    ]
  })
}

const wavelengthReading = (change: ObservedChange, roles: readonly string[]): readonly Reading[] => {
  const shifts = measuredOf(roles, (role): Measured | null => {
    const move = movementOf(change, role)
    if (move === null) return null
    const [from, to] = [change.before[role]!.positionPerCm, change.now[role]!.positionPerCm]
    return [1e7 / to - 1e7 / from, (move[1] * 1e7) / from ** 2]
  })
  const shift = shifts.length === roles.length ? commonOf(shifts) : null
  if (shift === null || !isClear(shift)) return []
  const [nm, u] = [shift[0].toFixed(2).replace('-', '−'), shift[1].toFixed(2)]
  return [
    {
      diagnosis: 'wavelength',
      evidence: `All bands moved by the same ${nm} ± ${u} nm, as a shift of the instrument's wavelength axis would do.`,
    },
  ]
}

const concentrationReading = (change: ObservedChange, roles: readonly string[]): readonly Reading[] => {
  const moves = roles.map((role) => movementOf(change, role))
  if (moves.some((move) => move === null || isClear(move))) return []
  const factors = measuredOf(roles, (role): Measured | null => {
    const [from, to] = [change.before[role]!, change.now[role]!]
    if (from.height === null || to.height === null || from.uHeight === null || to.uHeight === null) return null
    if (from.height <= 0 || to.height <= 0) return null
    const factor = to.height / from.height
    return [factor, factor * Math.hypot(from.uHeight / from.height, to.uHeight / to.height)]
  })
  const factor = factors.length === roles.length ? commonOf(factors) : null
  if (factor === null || !isClear([factor[0] - 1, factor[1]])) return []
  return [
    {
      diagnosis: 'concentration',
      evidence: `No band moved, and all heights changed by the one factor ${factor[0].toFixed(3)} ± ${factor[1].toFixed(3)}: dilution, evaporation, or another path; the spectrum cannot tell these apart.`,
    },
  ]
}

const sayRole = (role: string): string => role.replace(/^nu/, 'ν')

const sayPercent = ([share, u]: Measured): string =>
  `${Math.round(share * 100)} ± ${Math.max(1, Math.round(u * 100))} %`

const movementsOf = (change: ObservedChange, roles: readonly string[]): string => {
  const said = measuredOf(roles, (role) => {
    const move = movementOf(change, role)
    if (move === null) return null
    const [value, u] = [Math.round(move[0]), Math.max(1, Math.round(move[1]))]
    return `${sayRole(role)} by ${value < 0 ? '−' : '+'}${Math.abs(value)} ± ${u} cm⁻¹`
  })
  return said.length === 0 ? '' : `Against the reference the bands moved: ${said.join(', ')}.`
}
