/**
 * The rotation groups O, D4 and D3 as sets of signed permutation matrices, and one diagonal element D₁₁ of every
 * irreducible representation, which is all that projecting on a first row needs. The representations are read off
 * the groups' own action on vectors and d orbitals, so no character table enters. d states are even: g is added for
 * Oh, D4h, D3d; in Td an S4 acts on even functions as the rotation C4 does, so the names of O serve, without g.
 */
import { type Matrix, rotateOrbitals } from './orbitals.ts'

export type Symmetry = 'O' | 'D4' | 'D3'

export interface Irrep {
  /** Mulliken symbol without g. */
  readonly name: string
  readonly dimension: number
  /** D₁₁ of each rotation, in the order of `rotations`. */
  readonly first: readonly number[]
}

export interface Group {
  readonly rotations: readonly Matrix[]
  /** 5 × 5, in the order of `rotations`. */
  readonly orbitals: readonly Matrix[]
  readonly irreps: readonly Irrep[]
}

const PERMUTATIONS = [
  [0, 1, 2],
  [1, 2, 0],
  [2, 0, 1],
  [0, 2, 1],
  [2, 1, 0],
  [1, 0, 2],
] as const

const determinant3 = (m: Matrix): number => {
  const [a, b, c] = m as [number[], number[], number[]]
  return (
    a[0]! * (b[1]! * c[2]! - b[2]! * c[1]!) -
    a[1]! * (b[0]! * c[2]! - b[2]! * c[0]!) +
    a[2]! * (b[0]! * c[1]! - b[1]! * c[0]!)
  )
}

/** All 24 signed permutations of the axes with determinant +1. */
const rotationsOfO: readonly Matrix[] = PERMUTATIONS.flatMap((order) =>
  [0, 1, 2, 3, 4, 5, 6, 7].map((signs) =>
    order.map((column, row) => [0, 1, 2].map((j) => (j === column ? ((signs >> row) & 1 ? -1 : 1) : 0))),
  ),
).filter((matrix) => determinant3(matrix) > 0)

const along = (vector: readonly number[], r: Matrix): number =>
  vector.reduce((sum, a, i) => sum + vector.reduce((inner, b, j) => inner + a * r[i]![j]! * b, 0), 0)

const keepsAxis =
  (axis: readonly number[]) =>
  (r: Matrix): boolean =>
    Math.abs(Math.abs(along(axis, r)) - 1) < 1e-9

const t = 1 / Math.sqrt(3)
const Z = [0, 0, 1]
const DIAGONAL = [t, t, t]
const ACROSS = [Math.SQRT1_2, -Math.SQRT1_2, 0]

type FirstElement = (rotation: Matrix, orbital: Matrix) => number

const IRREPS: Readonly<Record<Symmetry, readonly (readonly [name: string, dimension: number, first: FirstElement])[]>> =
  {
    O: [
      ['A1', 1, () => 1],
      ['A2', 1, (_, d) => d[0]![0]! * d[1]![1]! - d[0]![1]! * d[1]![0]!], // the determinant of E
      ['E', 2, (_, d) => d[0]![0]!], // z² of the pair z², x²−y²
      ['T1', 3, (r) => r[2]![2]!], // z of the vector
      ['T2', 3, (_, d) => d[2]![2]!], // xy of the triple
    ],
    D4: [
      ['A1', 1, () => 1],
      ['A2', 1, (r) => r[2]![2]!], // z
      ['B1', 1, (_, d) => d[1]![1]!], // x²−y²
      ['B2', 1, (_, d) => d[2]![2]!], // xy
      ['E', 2, (r) => r[0]![0]!], // x of the pair x, y
    ],
    D3: [
      ['A1', 1, () => 1],
      ['A2', 1, (r) => along(DIAGONAL, r)],
      ['E', 2, (r) => along(ACROSS, r)],
    ],
  }

const isOf: Readonly<Record<Symmetry, (r: Matrix) => boolean>> = {
  O: () => true,
  D4: keepsAxis(Z),
  D3: keepsAxis(DIAGONAL),
}

/** Rotations, their action on the orbitals and the irreps of one group. */
export const groupOf = (symmetry: Symmetry): Group => {
  const rotations = rotationsOfO.filter(isOf[symmetry])
  const orbitals = rotations.map(rotateOrbitals)
  const irreps = IRREPS[symmetry].map(([name, dimension, first]) => ({
    name,
    dimension,
    first: rotations.map((r, i) => first(r, orbitals[i]!)),
  }))
  return { rotations, orbitals, irreps }
}
