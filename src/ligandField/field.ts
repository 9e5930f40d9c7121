/** What a field is made of, and the refusal of fields that are none. */
import { EXIT, type Fault, FaultError } from '../fault.ts'
import type { Symmetry } from './group.ts'
import type { Geometry, Ion } from './types.ts'

/** Energies in cm⁻¹. At most one of the pairs (Ds, Dt) and (Dσ, Dτ), and ζ only without them. */
export interface Field {
  readonly geometry: Geometry
  /** Positive in every geometry. With Ds, Dt it is 10Dq of B1 → B2, in the plane across the axis. */
  readonly deltaPerCm: number
  readonly bPerCm: number
  readonly cPerCm: number
  readonly dsPerCm?: number
  readonly dtPerCm?: number
  readonly dSigmaPerCm?: number
  readonly dTauPerCm?: number
  /** Spin–orbit coupling constant of one d electron, positive. */
  readonly zetaPerCm?: number
}

const fault = (at: string, what: string, remedy: string): Fault => ({
  code: 'ligand-field',
  place: { at },
  what,
  remedy,
})

const countFault = (d: number): Fault | null => {
  if (d === 0) return fault('ion', 'd0 has no d electrons and so no d-d bands', 'look for charge transfer instead')
  if (d === 10) return fault('ion', 'd10 is a full shell and has no d-d bands', 'look for charge transfer instead')
  if (Number.isInteger(d) && d > 0 && d < 10) return null
  return fault('ion', `${d} is no number of d electrons`, 'give an ion, or a whole number from 1 to 9')
}

const NAMES: readonly (readonly [key: keyof Field, name: string, mayBeNegative: boolean])[] = [
  ['deltaPerCm', 'delta', false],
  ['bPerCm', 'B', false],
  ['cPerCm', 'C', false],
  ['zetaPerCm', 'zeta', false],
  ['dsPerCm', 'Ds', true],
  ['dtPerCm', 'Dt', true],
  ['dSigmaPerCm', 'Dsigma', true],
  ['dTauPerCm', 'Dtau', true],
]

/** Everything that is wrong with a field for dⁿ, in the order of its parameters; empty where it can be computed. */
export const faultsOfField = (d: number, field: Field): readonly Fault[] => {
  const faults: Fault[] = []
  const count = countFault(d)
  if (count !== null) faults.push(count)
  for (const [key, name, mayBeNegative] of NAMES) {
    const value = field[key]
    if (typeof value !== 'number') continue
    if (!Number.isFinite(value)) faults.push(fault(name, `${value} is no energy`, `give ${name} as a number in cm^-1`))
    else if (value < 0 && !mayBeNegative)
      faults.push(
        fault(
          name,
          `${name} is ${value} cm^-1, below zero`,
          name === 'delta' ? 'give its size: it is positive in every geometry, tetrahedral too' : 'give it positive',
        ),
      )
  }
  const tetragonal = (field.dsPerCm ?? 0) !== 0 || (field.dtPerCm ?? 0) !== 0
  const trigonal = (field.dSigmaPerCm ?? 0) !== 0 || (field.dTauPerCm ?? 0) !== 0
  const coupled = (field.zetaPerCm ?? 0) !== 0
  if (tetragonal && trigonal)
    faults.push(fault('Ds, Dsigma', 'tetragonal and trigonal parameters together', 'give Ds, Dt or Dsigma, Dtau'))
  if ((tetragonal || trigonal) && field.geometry === 'tetrahedral')
    faults.push(fault('geometry', 'distortions are those of an octahedron', 'leave them out, or take octahedral'))
  if ((tetragonal || trigonal) && coupled)
    faults.push(fault('zeta', 'spin-orbit coupling in a distorted field', 'leave out zeta or the distortion'))
  return faults
}

/** Throws what is wrong with a field as a `FaultError` with the exit code for usage. */
export const refuseBadField = (d: number, field: Field): void => {
  const faults = faultsOfField(d, field)
  if (faults.length > 0) throw new FaultError(faults, EXIT.usage)
}

/** The group in which levels are labelled. */
export const symmetryOf = (field: Field): Symmetry => {
  if ((field.dsPerCm ?? 0) !== 0 || (field.dtPerCm ?? 0) !== 0) return 'D4'
  return (field.dSigmaPerCm ?? 0) !== 0 || (field.dTauPerCm ?? 0) !== 0 ? 'D3' : 'O'
}

/** Parameters in the order of the blocks' matrices; the tetrahedral field is the octahedral one turned over. */
export const parametersOf = (field: Field, symmetry: Symmetry): readonly number[] => {
  const delta = field.geometry === 'tetrahedral' ? -field.deltaPerCm : field.deltaPerCm
  if (symmetry === 'D4') return [delta, field.dsPerCm ?? 0, field.dtPerCm ?? 0, field.bPerCm, field.cPerCm]
  if (symmetry === 'D3') return [delta, field.dSigmaPerCm ?? 0, field.dTauPerCm ?? 0, field.bPerCm, field.cPerCm]
  return [delta, field.bPerCm, field.cPerCm]
}

/** Number of d electrons of an ion, or the number itself. */
export const electronsOf = (ion: Ion | number): number => (typeof ion === 'number' ? ion : ion.d)

/** `g` where the figure has a centre of inversion. */
export const parityOf = (geometry: Geometry): string => (geometry === 'octahedral' ? 'g' : '')
