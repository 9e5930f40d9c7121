/**
 * A second, independent computation to hold the room against: all C(10, n) determinants of spin orbitals |m, ms>, Slater's
 * rules with the c^k coefficients of Condon and Shortley for l = 2, the undivided matrix diagonalised by ml-matrix.
 * Nothing here is shared with src.
 */
import { EigenvalueDecomposition, Matrix } from 'ml-matrix'

/** c²(m, m') in units of 1/7 and c⁴(m, m') in units of 1/21, squared, with their signs (Condon & Shortley, table 1⁶). */
const C2: Record<string, number> = {
  '2,2': -2,
  '2,1': Math.sqrt(6),
  '2,0': -2,
  '1,1': 1,
  '1,0': 1,
  '0,0': 2,
  '1,-1': -Math.sqrt(6),
  '2,-1': 0,
  '2,-2': 0,
}
const C4: Record<string, number> = {
  '2,2': 1,
  '2,1': -Math.sqrt(5),
  '2,0': Math.sqrt(15),
  '1,1': -4,
  '1,0': Math.sqrt(30),
  '0,0': 6,
  '1,-1': -Math.sqrt(40),
  '2,-1': -Math.sqrt(35),
  '2,-2': Math.sqrt(70),
}

const ck = (table: Record<string, number>, unit: number, m1: number, m2: number): number => {
  // c^k(m, m') = (−1)^(m−m') c^k(m', m) = c^k(−m, −m')
  const sign = (m1 - m2) % 2 === 0 ? 1 : -1
  for (const [a, b, s] of [
    [m1, m2, 1],
    [m2, m1, sign],
    [-m1, -m2, 1],
    [-m2, -m1, sign],
  ] as const) {
    const value = table[`${a},${b}`]
    if (value !== undefined) return (s * value) / unit
  }
  throw new Error(`c^k(${m1},${m2})`)
}

const mOf = (i: number): number => Math.floor(i / 2) - 2
const spinOf = (i: number): number => i % 2

/** <ab|1/r|cd> with F0 = A + 7C/5 (A = 0), F2 = 49(B + C/7), F4 = 441 C/35. */
const repulsion = (a: number, b: number, c: number, d: number, B: number, C: number): number => {
  if (spinOf(a) !== spinOf(c) || spinOf(b) !== spinOf(d) || mOf(a) + mOf(b) !== mOf(c) + mOf(d)) return 0
  const f = [1.4 * C, 49 * (B + C / 7), (441 * C) / 35]
  const direct = mOf(a) === mOf(c) && mOf(b) === mOf(d) ? f[0]! : 0
  return (
    direct +
    f[1]! * ck(C2, 7, mOf(a), mOf(c)) * ck(C2, 7, mOf(d), mOf(b)) +
    f[2]! * ck(C4, 21, mOf(a), mOf(c)) * ck(C4, 21, mOf(d), mOf(b))
  )
}

export interface BruteField {
  readonly delta: number
  readonly ds?: number
  readonly dt?: number
  readonly zeta?: number
  /** Axis of quantisation and of Ds, Dt (Dσ, Dτ); fourfold unless said. */
  readonly axis?: 'fourfold' | 'threefold'
  readonly B: number
  readonly C: number
}

const oneElectron = (
  i: number,
  j: number,
  { delta, ds = 0, dt = 0, zeta = 0, axis = 'fourfold' }: BruteField,
): number => {
  const [m, mj] = [mOf(i), mOf(j)]
  let h = 0
  if (spinOf(i) === spinOf(j)) {
    if (m === mj) {
      const k = Math.abs(m)
      // 10Dq = delta: m = 0 +6Dq, ±1 −4Dq, ±2 +Dq; Ds, Dt as tabulated for a tetragonal field
      h +=
        delta * (axis === 'fourfold' ? [0.6, -0.4, 0.1] : [-0.4, 8 / 30, -2 / 30])[k]! +
        ds * [-2, -1, 2][k]! +
        dt * [-6, 4, -1][k]!
      h += zeta * m * (spinOf(i) === 0 ? 0.5 : -0.5)
    }
    if (axis === 'fourfold') {
      if (m === -mj && Math.abs(m) === 2) h += 0.5 * delta
    } else if (Math.abs(m - mj) === 3) h += (Math.SQRT2 / 3) * delta * (Math.max(m, mj) === 2 ? 1 : -1)
  } else {
    // l+ s− and l− s+
    if (spinOf(i) === 1 && m === mj + 1) h += (zeta / 2) * Math.sqrt(6 - mj * m)
    if (spinOf(i) === 0 && m === mj - 1) h += (zeta / 2) * Math.sqrt(6 - mj * m)
  }
  return h
}

/** All C(10, n) energies, ascending, not shifted to the ground level. */
export const bruteEnergies = (n: number, field: BruteField): readonly number[] => {
  const sets: number[][] = []
  const choose = (from: number, taken: number[]): void => {
    if (taken.length === n) sets.push(taken)
    else for (let i = from; i < 10; i += 1) choose(i + 1, [...taken, i])
  }
  choose(0, [])
  const h = Matrix.zeros(sets.length, sets.length)
  const g = (a: number, b: number, c: number, d: number): number =>
    repulsion(a, b, c, d, field.B, field.C) - repulsion(a, b, d, c, field.B, field.C)
  sets.forEach((bra, row) => {
    sets.forEach((ket, column) => {
      if (column < row) return
      const left = bra.filter((i) => !ket.includes(i))
      const right = ket.filter((i) => !bra.includes(i))
      if (left.length > 2) return
      const both = bra.filter((i) => ket.includes(i))
      const sign =
        [...left.map((i) => bra.indexOf(i)), ...right.map((i) => ket.indexOf(i))].reduce((s, k) => s + k, 0) % 2 === 0
          ? 1
          : -1
      let value = 0
      if (left.length === 0)
        value =
          bra.reduce((sum, i) => sum + oneElectron(i, i, field), 0) +
          bra.reduce((sum, i) => sum + bra.reduce((inner, j) => inner + (j > i ? g(i, j, i, j) : 0), 0), 0)
      else if (left.length === 1)
        value =
          sign *
          (oneElectron(left[0]!, right[0]!, field) + both.reduce((sum, j) => sum + g(left[0]!, j, right[0]!, j), 0))
      else value = sign * g(left[0]!, left[1]!, right[0]!, right[1]!)
      h.set(row, column, value)
      h.set(column, row, value)
    })
  })
  return [...new EigenvalueDecomposition(h, { assumeSymmetric: true }).realEigenvalues].sort((a, b) => a - b)
}
