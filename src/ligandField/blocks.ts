/**
 * The energy matrices of dⁿ, block by block. For each spin S the highest states M_S = S are the determinants with
 * (n+2S)/2 α and (n−2S)/2 β electrons that are no image of S₋ from above; for each irrep they are projected on its
 * first row, P = (dim/|G|) Σ_g D₁₁(g) U(g). What remains is one small matrix per (S, irrep) and parameter:
 *
 *   H = Σₖ pₖ Mₖ,   p = (Δ, [Ds, Dt | Dσ, Dτ,] B, C),
 *
 * with E_ik = Σ_σ a†_iσ a_kσ, T_m = Σ tr(DᵢDₖDₘ) E_ik (see orbitals.ts) and the pair Q = Σᵢ a_i↓ a_i↑
 *
 *   M_B = 12 Σ_m T_m² − 7n,    M_C = Q†Q − S(S+1) + n/2 + n²/4
 *
 * (the exchange part Σ E_ik E_ki is the Casimir operator of the orbital group, 7n − n²/2 − 2S(S+1)), where Racah's A n(n−1)/2, common to all levels, is left out. Labels therefore come from S and the irrep of the
 * block, never from a degeneracy. Everything is built once per n and group, in a few milliseconds.
 */
import { addKronecker, type Dense, dense, orthonormalRange, product, sandwich, transposed } from './dense.ts'
import { groupOf, type Symmetry } from './group.ts'
import { cubicField, type Matrix, multiply, repulsionTensors, tetragonalFields, trigonalFields } from './orbitals.ts'
import { annihilate, oneElectron, rotateStrings, stringsOf } from './strings.ts'

export interface Block {
  readonly multiplicity: number
  /** Without g. */
  readonly irrep: string
  /** Of the irrep. */
  readonly dimension: number
  readonly size: number
  /** One `size` × `size` matrix per parameter: Δ, the two axial parameters where the group has them, B, C. */
  readonly matrices: readonly Float64Array[]
}

const identity = (size: number): number[][] =>
  Array.from({ length: size }, (_, i) => Array.from({ length: size }, (_, j) => (i === j ? 1 : 0)))

const fieldsOf: Readonly<Record<Symmetry, readonly Matrix[]>> = {
  O: [cubicField],
  D4: [cubicField, ...tetragonalFields],
  D3: [cubicField, ...trigonalFields],
}

/** Operators among the determinants of `alpha` and `beta` electrons. */
const operators = (symmetry: Symmetry, alpha: number, beta: number): readonly Dense[] => {
  const n = alpha + beta
  const oneA = identity(stringsOf(alpha).length)
  const oneB = identity(stringsOf(beta).length)
  const size = oneA.length * oneB.length
  const addSquare = (into: Dense, factor: number, h: Matrix): void => {
    const a = oneElectron(h, alpha)
    const b = oneElectron(h, beta)
    addKronecker(into, factor, multiply(a, a), oneB)
    addKronecker(into, 2 * factor, a, b)
    addKronecker(into, factor, oneA, multiply(b, b))
  }
  const fields = fieldsOf[symmetry].map((h) => {
    const field = dense(size, size)
    addKronecker(field, 1, oneElectron(h, alpha), oneB)
    addKronecker(field, 1, oneA, oneElectron(h, beta))
    return field
  })
  const racahB = dense(size, size)
  addKronecker(racahB, -7 * n, oneA, oneB)
  for (const t of repulsionTensors) addSquare(racahB, 12, t)
  return [...fields, racahB, pairing(alpha, beta)]
}

/** M_C among the determinants of highest M_S. */
const pairing = (alpha: number, beta: number): Dense => {
  const n = alpha + beta
  const spin = (alpha - beta) / 2
  const size = stringsOf(alpha).length * stringsOf(beta).length
  const out = dense(size, size)
  if (beta > 0) {
    const pair = dense(stringsOf(alpha - 1).length * stringsOf(beta - 1).length, size)
    for (const i of [0, 1, 2, 3, 4]) addKronecker(pair, 1, annihilate(i, alpha), annihilate(i, beta))
    out.data.set(product(transposed(pair), pair).data)
  }
  for (let i = 0; i < size; i += 1) out.data[i * size + i]! += n / 2 + (n * n) / 4 - spin * (spin + 1)
  return out
}

/** Orthonormal basis of the states of highest M_S = S among the determinants. */
const highestStates = (alpha: number, beta: number): Dense => {
  const size = stringsOf(alpha).length * stringsOf(beta).length
  const rest = dense(size, size)
  addKronecker(rest, 1, identity(stringsOf(alpha).length), identity(stringsOf(beta).length))
  if (alpha === 5 || beta === 0) return rest
  const above = stringsOf(alpha + 1).length * stringsOf(beta - 1).length
  const lowering = dense(size, above)
  for (const i of [0, 1, 2, 3, 4]) {
    const create = annihilate(i, beta)[0]!.map((_, k) => annihilate(i, beta).map((row) => row[k]!))
    addKronecker(lowering, 1, annihilate(i, alpha + 1), create)
  }
  const lowered = orthonormalRange(lowering, above)
  const projector = product(lowered, transposed(lowered))
  for (let i = 0; i < rest.data.length; i += 1) rest.data[i]! -= projector.data[i]!
  return orthonormalRange(rest, size - above)
}

const build = (n: number, symmetry: Symmetry): readonly Block[] => {
  const group = groupOf(symmetry)
  const blocks: Block[] = []
  const highest = Math.min(n, 10 - n)
  for (let unpaired = highest; unpaired >= 0; unpaired -= 2) {
    const alpha = (n + unpaired) / 2
    const beta = (n - unpaired) / 2
    const states = highestStates(alpha, beta)
    const hamiltonian = operators(symmetry, alpha, beta).map((operator) => sandwich(operator, states))
    const turned = group.orbitals.map(
      (r) => [rotateStrings(r, stringsOf(alpha)), rotateStrings(r, stringsOf(beta))] as const,
    )
    for (const irrep of group.irreps) {
      const projector = dense(states.rows, states.rows)
      turned.forEach(([a, b], g) => {
        addKronecker(projector, (irrep.dimension * irrep.first[g]!) / group.rotations.length, a, b)
      })
      const inside = sandwich(projector, states)
      let trace = 0
      for (let i = 0; i < inside.rows; i += 1) trace += inside.data[i * inside.columns + i]!
      const size = Math.round(trace)
      if (size === 0) continue
      const basis = orthonormalRange(inside, size)
      const matrices = hamiltonian.map((operator) => sandwich(operator, basis).data)
      blocks.push({ multiplicity: unpaired + 1, irrep: irrep.name, dimension: irrep.dimension, size, matrices })
    }
  }
  return blocks
}

const built = new Map<string, readonly Block[]>()

/** Blocks of dⁿ (n = 1 to 9), multiplicities descending; the same array on every call. */
export const blocksOf = (n: number, symmetry: Symmetry): readonly Block[] => {
  const key = `${n} ${symmetry}`
  const known = built.get(key)
  if (known !== undefined) return known
  const blocks = build(n, symmetry)
  built.set(key, blocks)
  return blocks
}
