/**
 * dⁿ with spin–orbit coupling ζ Σ l·s in Oh or Td, labelled by the double group (Bethe's Γ1 … Γ8).
 *
 * Spin orbitals |m, mₛ⟩ make everything real: the cubic field is 0.6, −0.4, 0.1 on |m| = 0, 1, 2 with 0.5 between
 * m = 2 and −2; repulsion is M_B = 12 Σ_q T_q†T_q − 7n with T₀ = (2 − m²)/√24, T_{q+1} = [l₊, T_q]/√(6 − q(q+1)), and
 * M_C = Q†Q − S² + n/2 + n²/4 with Q = Σₘ (−1)ᵐ a_{−m↓} a_{m↑} (see blocks.ts).
 *
 * A turn by 90° about z only multiplies |M_J⟩ by exp(−iπM_J/2), so determinants fall into sectors M_J mod 4. In one
 * sector every irrep has at most one row, and the sum K of the six 90° turns tells the irreps apart: it equals
 * 6χ(C₄)/dim. There K = 2 cos(πM_J/2) + 2(R + Rᵀ) with R the turn about y, whose matrix elements are real minors.
 */
import { type Dense, dense, orthonormalRange, product, sandwich, transposed } from './dense.ts'
import { eigenvalues } from './eigen.ts'
import type { Field } from './field.ts'
import { type Matrix, multiply } from './orbitals.ts'
import { annihilate, occupied, oneElectron, rotateStrings, stringsOf } from './strings.ts'
import type { Level } from './types.ts'

interface DoubleBlock {
  readonly irrep: string
  readonly dimension: number
  readonly size: number
  /** Δ, B, C, ζ. */
  readonly matrices: readonly Float64Array[]
}

/** Name, dimension, 2M_J mod 8 of the sector, K. */
type DoubleIrrep = readonly [name: string, dimension: number, sector: number, k: number]

const EVEN: readonly DoubleIrrep[] = [
  ['Γ1', 1, 0, 6],
  ['Γ2', 1, 4, -6],
  ['Γ3', 2, 0, 0],
  ['Γ4', 3, 0, 2],
  ['Γ5', 3, 4, -2],
]
const ODD: readonly DoubleIrrep[] = [
  ['Γ6', 2, 1, 3 * Math.SQRT2],
  ['Γ7', 2, 5, -3 * Math.SQRT2],
  ['Γ8', 4, 1, 0],
]

/** Spin orbital i: m = ⌊i/2⌋ − 2, mₛ = ½ for even i. */
const ten = Array.from({ length: 10 }, (_, i) => i)
const mOf = (i: number): number => (i >> 1) - 2
const isDown = (i: number): boolean => i % 2 === 1
const operator = (entry: (i: number, j: number) => number): number[][] => ten.map((i) => ten.map((j) => entry(i, j)))
const sameSpin = (i: number, j: number): boolean => i % 2 === j % 2

const cubic = operator((i, j) => {
  if (!sameSpin(i, j)) return 0
  if (i === j) return [0.6, -0.4, 0.1][Math.abs(mOf(i))]!
  return Math.abs(mOf(i)) === 2 && mOf(i) === -mOf(j) ? 0.5 : 0
})
const lPlus = operator((i, j) => (sameSpin(i, j) && mOf(i) === mOf(j) + 1 ? Math.sqrt(6 - mOf(j) * mOf(i)) : 0))
const sPlus = operator((i, j) => (mOf(i) === mOf(j) && !isDown(i) && isDown(j) ? 1 : 0))
const flip = (a: Matrix): number[][] => operator((i, j) => a[j]![i]!)
const coupling = operator((i, j) => {
  const ladder = multiply(lPlus, flip(sPlus))
  return (i === j ? (mOf(i) * (isDown(i) ? -1 : 1)) / 2 : 0) + (ladder[i]![j]! + ladder[j]![i]!) / 2
})

/** T_q for q = −2 … 2. */
const tensors = ((): readonly Matrix[] => {
  const t0 = operator((i, j) => (i === j ? (2 - mOf(i) ** 2) / Math.sqrt(24) : 0))
  const raise = (t: Matrix, q: number): number[][] => {
    const left = multiply(lPlus, t)
    const right = multiply(t, lPlus)
    return operator((i, j) => (left[i]![j]! - right[i]![j]!) / Math.sqrt(6 - q * (q + 1)))
  }
  const t1 = raise(t0, 0)
  const t2 = raise(t1, 1)
  return [flip(t2), flip(t1), t0, t1, t2] // the sign of T₋q does not matter in T†T
})()

/** exp(−iπ/2 j_y), real: the series of the antisymmetric (j₋ − j₊)/2, scaled down and squared up. */
const quarterTurn = ((): Matrix => {
  const halvings = 8
  const a = operator(
    (i, j) => (((lPlus[j]![i]! + sPlus[j]![i]! - lPlus[i]![j]! - sPlus[i]![j]!) / 2) * (Math.PI / 2)) / 2 ** halvings,
  )
  let term: Matrix = operator((i, j) => (i === j ? 1 : 0))
  let sum: Matrix = term
  for (let k = 1; k < 20; k += 1) {
    term = multiply(term, a).map((row) => row.map((x) => x / k))
    sum = operator((i, j) => sum[i]![j]! + term[i]![j]!)
  }
  for (let k = 0; k < halvings; k += 1) sum = multiply(sum, sum)
  return sum
})()

const toDense = (rows: readonly (readonly number[])[]): Dense => {
  const out = dense(rows.length, rows[0]!.length)
  rows.forEach((row, i) => {
    out.data.set(row, i * row.length)
  })
  return out
}

const addTo = (into: Dense, a: Dense, factor: number): void => {
  for (let i = 0; i < into.data.length; i += 1) into.data[i]! += factor * a.data[i]!
}

const addToDiagonal = (into: Dense, value: number): void => {
  for (let i = 0; i < into.rows; i += 1) into.data[i * into.columns + i]! += value
}

/** Matrices of Δ, B, C, ζ among all determinants. */
const hamiltonian = (n: number): readonly Dense[] => {
  const many = (h: Matrix): Dense => toDense(oneElectron(h, n))
  const field = many(cubic)
  const racahB = dense(field.rows, field.columns)
  for (const t of tensors) {
    const tensor = many(t)
    addTo(racahB, product(transposed(tensor), tensor), 12)
  }
  addToDiagonal(racahB, -7 * n)
  const racahC = dense(field.rows, field.columns)
  if (n > 1) {
    const pair = dense(stringsOf(n - 2, 10).length, field.columns)
    for (const i of ten.filter((i) => !isDown(i))) {
      const partner = 2 * (2 - mOf(i)) + 1
      const both = product(toDense(annihilate(partner, n - 1, 10)), toDense(annihilate(i, n, 10)))
      addTo(pair, both, mOf(i) % 2 === 0 ? 1 : -1)
    }
    addTo(racahC, product(transposed(pair), pair), 1)
  }
  // S² = S₋S₊ + M_S(M_S + 1)
  const raising = many(sPlus)
  addTo(racahC, product(transposed(raising), raising), -1)
  stringsOf(n, 10).forEach((set, i) => {
    const ms = occupied(set).reduce((sum, orbital) => sum + (isDown(orbital) ? -0.5 : 0.5), 0)
    racahC.data[i * racahC.columns + i]! += n / 2 + (n * n) / 4 - ms * (ms + 1)
  })
  return [field, racahB, racahC, many(coupling)]
}

const doubledM = (set: number): number => occupied(set).reduce((sum, i) => sum + 2 * mOf(i) + (isDown(i) ? -1 : 1), 0)

const restrict = (a: Dense, to: readonly number[]): Dense =>
  toDense(to.map((i) => to.map((j) => a.data[i * a.columns + j]!)))

const build = (n: number): readonly DoubleBlock[] => {
  const strings = stringsOf(n, 10)
  const full = hamiltonian(n)
  const irreps = n % 2 === 0 ? EVEN : ODD
  return [...new Set(irreps.map(([, , sector]) => sector))].flatMap((sector) => {
    const inside = strings.map((_, i) => i).filter((i) => (doubledM(strings[i]!) & 7) === sector)
    if (inside.length === 0) return []
    const matrices = full.map((matrix) => restrict(matrix, inside))
    const turn = toDense(
      rotateStrings(
        quarterTurn,
        inside.map((i) => strings[i]!),
      ),
    )
    const k = dense(inside.length, inside.length)
    addTo(k, turn, 2)
    addTo(k, transposed(turn), 2)
    addToDiagonal(k, 2 * Math.cos((Math.PI * sector) / 4))
    // all values that K takes in the sector; those of other irreps are projected out
    const values = irreps
      .filter(([name, , at]) => at === sector || name === 'Γ3' || name === 'Γ8')
      .map(([, , , x]) => x)
    return irreps
      .filter(([, , at]) => at === sector)
      .flatMap(([irrep, dimension, , own]) => {
        const projector = values
          .filter((other) => other !== own)
          .reduce((so, other) => {
            const factor = dense(k.rows, k.columns)
            addTo(factor, k, 1 / (own - other))
            addToDiagonal(factor, -other / (own - other))
            return product(so, factor)
          }, identityOf(k.rows))
        let trace = 0
        for (let i = 0; i < k.rows; i += 1) trace += projector.data[i * k.columns + i]!
        const size = Math.round(trace)
        if (size === 0) return []
        const basis = orthonormalRange(projector, size)
        return [{ irrep, dimension, size, matrices: matrices.map((matrix) => sandwich(matrix, basis).data) }]
      })
  })
}

const identityOf = (size: number): Dense => {
  const out = dense(size, size)
  addToDiagonal(out, 1)
  return out
}

const built = new Map<number, readonly DoubleBlock[]>()

/** Levels with spin–orbit coupling, ascending from the ground level; `multiplicity` is 1, spin is in the irrep. */
export const spinOrbitLevels = (d: number, field: Field): readonly Level[] => {
  const blocks = built.get(d) ?? build(d)
  built.set(d, blocks)
  const delta = field.geometry === 'tetrahedral' ? -field.deltaPerCm : field.deltaPerCm
  const parameters = [delta, field.bPerCm, field.cPerCm, field.zetaPerCm ?? 0]
  const out = blocks.flatMap(({ irrep, dimension, size, matrices }) => {
    const sum = new Float64Array(size * size)
    matrices.forEach((matrix, k) => {
      for (let i = 0; i < sum.length; i += 1) sum[i]! += parameters[k]! * matrix[i]!
    })
    const roots = new Float64Array(size)
    eigenvalues(sum, size, roots)
    return [...roots].map((energyPerCm, root) => ({
      label: irrep,
      index: root + 1,
      multiplicity: 1,
      irrep,
      degeneracy: dimension,
      energyPerCm,
    }))
  })
  const ground = Math.min(...out.map(({ energyPerCm }) => energyPerCm))
  return out
    .map((level) => ({ ...level, energyPerCm: level.energyPerCm - ground }))
    .sort((a, b) => a.energyPerCm - b.energyPerCm)
}
