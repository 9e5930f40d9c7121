/**
 * Dot products of columns with each other, three by three: nine sums for six reads, which is as many as stay in registers.
 * Reading the columns is what takes the time of a fit.
 */

/** Columns in groups of three. */
export type Triple = readonly [Float64Array, Float64Array, Float64Array]

/** Writes the products of the columns `a` (rows) and `b` into a square matrix of `size` at (row, column), and at its mirror image. */
export const gramBlock = (
  [a0, a1, a2]: Triple,
  [b0, b1, b2]: Triple,
  into: Float64Array,
  size: number,
  row: number,
  column: number,
): void => {
  let s00 = 0
  let s01 = 0
  let s02 = 0
  let s10 = 0
  let s11 = 0
  let s12 = 0
  let s20 = 0
  let s21 = 0
  let s22 = 0
  const count = a0.length
  for (let i = 0; i < count; i++) {
    const p = a0[i]!
    const q = a1[i]!
    const r = a2[i]!
    const u = b0[i]!
    const v = b1[i]!
    const w = b2[i]!
    s00 += p * u
    s01 += p * v
    s02 += p * w
    s10 += q * u
    s11 += q * v
    s12 += q * w
    s20 += r * u
    s21 += r * v
    s22 += r * w
  }
  place(into, size, row, column, s00, s01, s02)
  place(into, size, row + 1, column, s10, s11, s12)
  place(into, size, row + 2, column, s20, s21, s22)
}

const place = (into: Float64Array, size: number, row: number, column: number, a: number, b: number, c: number) => {
  into[row * size + column] = into[column * size + row] = a
  into[row * size + column + 1] = into[(column + 1) * size + row] = b
  into[row * size + column + 2] = into[(column + 2) * size + row] = c
}
