/** Dense matrices of the block builder: rows first in a Float64Array. */

export interface Dense {
  readonly rows: number
  readonly columns: number
  readonly data: Float64Array
}

export const dense = (rows: number, columns: number): Dense => ({
  rows,
  columns,
  data: new Float64Array(rows * columns),
})

/** `into` += factor · (a ⊗ b) */
export const addKronecker = (
  into: Dense,
  factor: number,
  a: readonly (readonly number[])[],
  b: readonly (readonly number[])[],
): void => {
  const bRows = b.length
  const bColumns = b[0]!.length
  for (let i = 0; i < a.length; i += 1)
    for (let j = 0; j < a[0]!.length; j += 1) {
      const left = factor * a[i]![j]!
      if (left === 0) continue
      for (let k = 0; k < bRows; k += 1)
        for (let l = 0; l < bColumns; l += 1)
          into.data[(i * bRows + k) * into.columns + j * bColumns + l]! += left * b[k]![l]!
    }
}

export const product = (a: Dense, b: Dense): Dense => {
  const out = dense(a.rows, b.columns)
  for (let i = 0; i < a.rows; i += 1)
    for (let k = 0; k < a.columns; k += 1) {
      const x = a.data[i * a.columns + k]!
      if (x === 0) continue
      for (let j = 0; j < b.columns; j += 1) out.data[i * b.columns + j]! += x * b.data[k * b.columns + j]!
    }
  return out
}

export const transposed = (a: Dense): Dense => {
  const out = dense(a.columns, a.rows)
  for (let i = 0; i < a.rows; i += 1)
    for (let j = 0; j < a.columns; j += 1) out.data[j * a.rows + i] = a.data[i * a.columns + j]!
  return out
}

/** vᵀ a v */
export const sandwich = (a: Dense, v: Dense): Dense => product(transposed(v), product(a, v))

/**
 * Orthonormal basis (as columns) of the space that the columns of `a` span, by Gram–Schmidt with pivots, each vector
 * orthogonalised twice. `rank` is known beforehand from group theory or counting; the longest rests are taken.
 */
export const orthonormalRange = (a: Dense, rank: number): Dense => {
  const rest = Array.from({ length: a.columns }, (_, j) =>
    Float64Array.from({ length: a.rows }, (_, i) => a.data[i * a.columns + j]!),
  )
  const dot = (x: Float64Array, y: Float64Array): number => {
    let sum = 0
    for (let i = 0; i < x.length; i += 1) sum += x[i]! * y[i]!
    return sum
  }
  const basis: Float64Array[] = []
  while (basis.length < rank) {
    const norms = rest.map((column) => dot(column, column))
    const v = rest[norms.indexOf(Math.max(...norms))]!.slice()
    for (let pass = 0; pass < 2; pass += 1)
      for (const b of basis) {
        const overlap = dot(b, v)
        for (let i = 0; i < v.length; i += 1) v[i]! -= overlap * b[i]!
      }
    const length = Math.sqrt(dot(v, v))
    for (let i = 0; i < v.length; i += 1) v[i]! /= length
    basis.push(v)
    for (const column of rest) {
      const overlap = dot(v, column)
      for (let i = 0; i < column.length; i += 1) column[i]! -= overlap * v[i]!
    }
  }
  const out = dense(a.rows, rank)
  basis.forEach((v, j) => {
    v.forEach((x, i) => {
      out.data[i * rank + j] = x
    })
  })
  return out
}
