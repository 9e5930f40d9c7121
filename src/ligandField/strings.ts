/**
 * Sets of occupied orbitals, as bits of a number. Without spin–orbit coupling electrons of one spin fill five orbitals and
 * a determinant is a pair of an α and a β string, so that operators are Kronecker products of matrices of at most
 * 10 × 10. With it a determinant is one string over ten spin orbitals.
 */
import type { Matrix } from './orbitals.ts'

const bits = (set: number): number => {
  let count = 0
  for (let rest = set; rest !== 0; rest &= rest - 1) count += 1
  return count
}

/** All strings with `count` electrons in five (or `orbitals`) orbitals, ascending. */
export const stringsOf = (count: number, orbitals = 5): readonly number[] =>
  Array.from({ length: 1 << orbitals }, (_, set) => set).filter((set) => bits(set) === count)

/** Orbitals of a string, ascending. */
export const occupied = (set: number): readonly number[] =>
  Array.from({ length: 10 }, (_, i) => i).filter((i) => (set >> i) & 1)

/** Sign of moving past the electrons before orbital i. */
const sign = (set: number, i: number): number => (bits(set & ((1 << i) - 1)) % 2 === 0 ? 1 : -1)

const zeros = (rows: number, columns: number): number[][] => Array.from({ length: rows }, () => Array(columns).fill(0))

/** Matrix of the one-electron operator `h` (one row per orbital) among strings of `count` electrons: Σ hᵢⱼ aᵢ†aⱼ. */
export const oneElectron = (h: Matrix, count: number): number[][] => {
  const strings = stringsOf(count, h.length)
  const out = zeros(strings.length, strings.length)
  strings.forEach((from, column) => {
    for (const j of occupied(from)) {
      const without = from & ~(1 << j)
      for (let i = 0; i < h.length; i += 1) {
        if (h[i]![j]! === 0) continue
        if ((without >> i) & 1) continue
        const row = strings.indexOf(without | (1 << i))
        out[row]![column]! += sign(from, j) * sign(without, i) * h[i]![j]!
      }
    }
  })
  return out
}

/** Takes an electron out of orbital i: from `count` to `count − 1` electrons. */
export const annihilate = (i: number, count: number, orbitals = 5): number[][] => {
  const from = stringsOf(count, orbitals)
  const to = stringsOf(count - 1, orbitals)
  const out = zeros(to.length, from.length)
  from.forEach((set, column) => {
    if ((set >> i) & 1) out[to.indexOf(set & ~(1 << i))]![column] = sign(set, i)
  })
  return out
}

/** Determinant by elimination with pivots; `m` is small and is destroyed. */
const determinant = (m: number[][]): number => {
  let product = 1
  for (let k = 0; k < m.length; k += 1) {
    let pivot = k
    for (let i = k + 1; i < m.length; i += 1) if (Math.abs(m[i]![k]!) > Math.abs(m[pivot]![k]!)) pivot = i
    if (m[pivot]![k] === 0) return 0
    if (pivot !== k) {
      ;[m[k], m[pivot]] = [m[pivot]!, m[k]!]
      product = -product
    }
    product *= m[k]![k]!
    for (let i = k + 1; i < m.length; i += 1) {
      const factor = m[i]![k]! / m[k]![k]!
      for (let j = k + 1; j < m.length; j += 1) m[i]![j]! -= factor * m[k]![j]!
    }
  }
  return product
}

/** How strings turn when every electron's orbitals turn by `r`: the minors of `r`. */
export const rotateStrings = (r: Matrix, strings: readonly number[]): number[][] => {
  const sets = strings.map(occupied)
  return sets.map((row) => sets.map((column) => determinant(row.map((i) => column.map((j) => r[i]![j]!)))))
}
