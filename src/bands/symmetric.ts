/**
 * Small symmetric positive definite systems, row-major n × n, by Cholesky's decomposition of the matrix scaled to a unit
 * diagonal (van der Sluis 1969: within a factor n of the best diagonal scaling), so that wavenumbers of
 * 10⁴ cm⁻¹ and heights of 10⁻² may stand side by side.
 */

export interface Cholesky {
  readonly n: number
  /** Lower triangle of S A S. */
  readonly lower: Float64Array
  /** Diagonal of S. */
  readonly scale: Float64Array
}

/** Room for a decomposition of at most n × n, to be used again and again: in the innermost loop of a fit memory costs more than sums. */
export const roomFor = (n: number): Room => ({ lower: new Float64Array(n * n), scale: new Float64Array(n) })

type Room = Pick<Cholesky, 'lower' | 'scale'>

/** Null where the matrix is not positive definite to `tolerance` (smallest scaled pivot). Written into `room`. */
export const cholesky = (a: Float64Array, n: number, tolerance = 1e-13, room = roomFor(n)): Cholesky | null => {
  const { scale, lower } = room
  for (let i = 0; i < n; i++) {
    const d = a[i * n + i]!
    if (!(d > 0) || !Number.isFinite(d)) return null
    scale[i] = 1 / Math.sqrt(d)
  }
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = a[i * n + j]! * scale[i]! * scale[j]!
      for (let k = 0; k < j; k++) sum -= lower[i * n + k]! * lower[j * n + k]!
      if (i !== j) lower[i * n + j] = sum / lower[j * n + j]!
      else if (sum > tolerance) lower[i * n + i] = Math.sqrt(sum)
      else return null
    }
  }
  return { n, lower, scale }
}

/** L⁻¹ S b in place of b, which starts at `from`: half of a solution; the dot product of two of them is b' A⁻¹ c. */
export const forward = ({ n, lower, scale }: Cholesky, b: Float64Array, from = 0): void => {
  for (let i = 0; i < n; i++) {
    let sum = b[from + i]! * scale[i]!
    for (let k = 0; k < i; k++) sum -= lower[i * n + k]! * b[from + k]!
    b[from + i] = sum / lower[i * n + i]!
  }
}

/** A⁻¹ b */
export const solve = (factor: Cholesky, b: Float64Array): Float64Array => {
  const x = b.slice(0, factor.n)
  solveInPlace(factor, x)
  return x
}

/** A⁻¹ b in place of b. */
export const solveInPlace = (factor: Cholesky, x: Float64Array): void => {
  const { n, lower, scale } = factor
  forward(factor, x)
  for (let i = n - 1; i >= 0; i--) {
    let sum = x[i]!
    for (let k = i + 1; k < n; k++) sum -= lower[k * n + i]! * x[k]!
    x[i] = sum / lower[i * n + i]!
  }
  for (let i = 0; i < n; i++) x[i] = x[i]! * scale[i]!
}

/** A⁻¹, row-major. */
export const inverse = (factor: Cholesky): Float64Array => {
  const { n } = factor
  const result = new Float64Array(n * n)
  for (let j = 0; j < n; j++) {
    const unit = new Float64Array(n)
    unit[j] = 1
    const column = solve(factor, unit)
    for (let i = 0; i < n; i++) result[i * n + j] = column[i]!
  }
  return result
}

/** The entries `keep` of a vector, at the start of `into`. */
export const gathered = (
  values: Float64Array,
  keep: readonly number[],
  into = new Float64Array(keep.length),
): Float64Array => {
  for (let i = 0; i < keep.length; i++) into[i] = values[keep[i]!]!
  return into
}

/** The rows and columns `keep` of an n × n matrix, at the start of `into`. */
export const submatrix = (
  a: Float64Array,
  n: number,
  keep: readonly number[],
  into = new Float64Array(keep.length ** 2),
): Float64Array => {
  const m = keep.length
  for (let i = 0; i < m; i++) {
    const row = keep[i]! * n
    for (let j = 0; j < m; j++) into[i * m + j] = a[row + keep[j]!]!
  }
  return into
}
