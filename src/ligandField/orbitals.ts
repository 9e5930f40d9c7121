/**
 * The five d orbitals as symmetric traceless 3 × 3 tensors Dᵢ with tr(DᵢDⱼ) = δᵢⱼ, in the order z², x²−y², xy, xz, yz,
 * axes along the fourfold axes of the octahedron. A rotation R sends D to R D Rᵀ, so no table of phases is needed.
 *
 * Everything one-electron follows from them:
 *   cubic field       O = 0.6 on e, −0.4 on t2                          (times Δ)
 *   axial fields      along a unit vector n, with Lₙ the orbital angular momentum along n:
 *                     Ds: Lₙ² − 2, i.e. +2, −1, −2 on |m| = 2, 1, 0
 *                     Dt: −6 + (155 Lₙ² − 35 Lₙ⁴)/12, i.e. −1, +4, −6 on |m| = 2, 1, 0
 *                     n = z is tetragonal (Ds, Dt), n = (111)/√3 trigonal (Dσ, Dτ).
 *   electron repulsion  (ik|jl) = A δᵢₖδⱼₗ + 24 B Σₘ tᵢₖₘ tⱼₗₘ + C (δᵢₖδⱼₗ + δᵢⱼδₖₗ + δᵢₗδₖⱼ),  tᵢₖₘ = tr(DᵢDₖDₘ),
 *                     which is the multipole expansion with F⁰, F², F⁴ written in Racah's A, B, C
 *                     (F₀ = A + 7C/5, F₂ = B + C/7, F₄ = C/35): the k = 2 density of a pair is the traceless part of
 *                     DᵢDₖ, and k = 0, 2, 4 together exhaust the symmetric pairs.
 * Definitions of Ds, Dt, Dσ, Dτ as in Ballhausen, Introduction to Ligand Field Theory (1962), from memory; the
 * orbital energies they give are checked in the tests.
 */

/** Square matrix, rows first. */
export type Matrix = readonly (readonly number[])[]

const h = Math.SQRT1_2
const s = 1 / Math.sqrt(6)

const D: readonly Matrix[] = [
  [
    [-s, 0, 0],
    [0, -s, 0],
    [0, 0, 2 * s],
  ],
  [
    [h, 0, 0],
    [0, -h, 0],
    [0, 0, 0],
  ],
  [
    [0, h, 0],
    [h, 0, 0],
    [0, 0, 0],
  ],
  [
    [0, 0, h],
    [0, 0, 0],
    [h, 0, 0],
  ],
  [
    [0, 0, 0],
    [0, 0, h],
    [0, h, 0],
  ],
]

export const multiply = (a: Matrix, b: Matrix): number[][] =>
  a.map((row) => b[0]!.map((_, j) => row.reduce((sum, x, k) => sum + x * b[k]![j]!, 0)))

export const transpose = (a: Matrix): number[][] => a[0]!.map((_, j) => a.map((row) => row[j]!))

const trace = (a: Matrix): number => a.reduce((sum, row, i) => sum + row[i]!, 0)

const five = [0, 1, 2, 3, 4]
const square = (entry: (i: number, j: number) => number): number[][] => five.map((i) => five.map((j) => entry(i, j)))

/** How the orbitals turn under the rotation `r` (3 × 3): column i is the image of orbital i. */
export const rotateOrbitals = (r: Matrix): number[][] => {
  const images = D.map((tensor) => multiply(multiply(r, tensor), transpose(r)))
  return square((i, j) => trace(multiply(D[i]!, images[j]!)))
}

/** The five symmetric matrices T⁽ᵐ⁾ᵢₖ = tr(DᵢDₖDₘ) from which repulsion is built. */
export const repulsionTensors: readonly Matrix[] = five.map((m) =>
  square((i, k) => trace(multiply(multiply(D[i]!, D[k]!), D[m]!))),
)

/** Octahedral field in units of Δ. */
export const cubicField: Matrix = square((i, j) => (i === j ? (i < 2 ? 0.6 : -0.4) : 0))

/**
 * Lₙ² for the unit vector n. An infinitesimal turn about n is X ↦ ΩX − XΩ with Ω the cross-product matrix of n;
 * Lₙ is i times it, so Lₙ² is minus its square, which is real.
 */
const angularMomentumSquared = ([x, y, z]: readonly [number, number, number]): number[][] => {
  const omega = [
    [0, -z, y],
    [z, 0, -x],
    [-y, x, 0],
  ]
  const turned = D.map((tensor) => {
    const left = multiply(omega, tensor)
    const right = multiply(tensor, omega)
    return left.map((row, i) => row.map((value, j) => value - right[i]![j]!))
  })
  const turn = square((i, j) => trace(multiply(D[i]!, turned[j]!)))
  return multiply(turn, turn).map((row) => row.map((value) => -value))
}

const axialFields = (axis: readonly [number, number, number]): readonly [Matrix, Matrix] => {
  const l2 = angularMomentumSquared(axis)
  const l4 = multiply(l2, l2)
  const unit = (i: number, j: number): number => (i === j ? 1 : 0)
  return [
    square((i, j) => l2[i]![j]! - 2 * unit(i, j)),
    square((i, j) => -6 * unit(i, j) + (155 * l2[i]![j]! - 35 * l4[i]![j]!) / 12),
  ]
}

const c = 1 / Math.sqrt(3)

/** Operators of Ds and Dt (fourfold axis z). */
export const tetragonalFields = axialFields([0, 0, 1])

/** Operators of Dσ and Dτ (threefold axis 111). */
export const trigonalFields = axialFields([c, c, c])
