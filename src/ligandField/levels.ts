import { type Block, blocksOf } from './blocks.ts'
import { eigenvalues } from './eigen.ts'
import { electronsOf, type Field, parametersOf, parityOf, refuseBadField, symmetryOf } from './field.ts'
import type { Symmetry } from './group.ts'
import { spinOrbitLevels } from './spinOrbit.ts'
import type { Ion, Level } from './types.ts'

const work = new Float64Array(64 * 64)
const roots = new Float64Array(64)

/** What a level's name costs is paid once: everything but its energy, for every root of every block. */
type Name = Omit<Level, 'energyPerCm'>

const named = new Map<string, readonly Name[]>()

const namesOf = (d: number, symmetry: Symmetry, parity: string, blocks: readonly Block[]): readonly Name[] => {
  const key = `${d} ${symmetry} ${parity}`
  const known = named.get(key)
  if (known !== undefined) return known
  const names = blocks.flatMap(({ multiplicity, irrep, dimension, size }) =>
    Array.from({ length: size }, (_, root) => ({
      label: `${multiplicity}${irrep}${parity}`,
      index: root + 1,
      multiplicity,
      irrep: `${irrep}${parity}`,
      degeneracy: multiplicity * dimension,
    })),
  )
  named.set(key, names)
  return names
}

/** Writes Σₖ pₖ Mₖ of a block to the start of `into`. */
export const sumBlock = (block: Block, parameters: readonly number[], into: Float64Array): void => {
  const count = block.size * block.size
  const first = block.matrices[0]!
  const p0 = parameters[0]!
  for (let i = 0; i < count; i += 1) into[i] = p0 * first[i]!
  for (let k = 1; k < parameters.length; k += 1) {
    const matrix = block.matrices[k]!
    const p = parameters[k]!
    for (let i = 0; i < count; i += 1) into[i]! += p * matrix[i]!
  }
}

/** Energies of all roots, block after block, in the order of the blocks; cm⁻¹, Racah's A left out. */
const energiesOf = (blocks: readonly Block[], parameters: readonly number[], energies: Float64Array): void => {
  let at = 0
  for (const block of blocks) {
    sumBlock(block, parameters, work)
    eigenvalues(work, block.size, roots)
    for (let i = 0; i < block.size; i += 1) energies[at + i] = roots[i]!
    at += block.size
  }
}

/**
 * Every level of dⁿ in a field, ascending from the ground level, energies in cm⁻¹. Labels are Mulliken symbols of Oh,
 * Td, D4h or D3d; with ζ they are Γ1 … Γ8 of the double group (Bethe), where spin is in the irrep, so `multiplicity`
 * is 1 and `degeneracy` that of the irrep. Levels of equal energy have no order.
 *
 * Throws a `FaultError` for n = 0, n = 10, energies that are none, negative Δ, B, C or ζ, and mixed distortions.
 */
export const levels = (ion: Ion | number, field: Field): readonly Level[] => {
  const d = electronsOf(ion)
  refuseBadField(d, field)
  if ((field.zetaPerCm ?? 0) !== 0) return spinOrbitLevels(d, field)
  const symmetry = symmetryOf(field)
  const blocks = blocksOf(d, symmetry)
  const names = namesOf(d, symmetry, parityOf(field.geometry), blocks)
  const energies = new Float64Array(names.length)
  energiesOf(blocks, parametersOf(field, symmetry), energies)
  let ground = energies[0]!
  for (let i = 1; i < energies.length; i += 1) if (energies[i]! < ground) ground = energies[i]!
  const out: Level[] = []
  for (let i = 0; i < names.length; i += 1) {
    const { label, index, multiplicity, irrep, degeneracy } = names[i]!
    out.push({ label, index, multiplicity, irrep, degeneracy, energyPerCm: energies[i]! - ground })
  }
  return out.sort((a, b) => a.energyPerCm - b.energyPerCm)
}
