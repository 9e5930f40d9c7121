/**
 * Eigenvalues of small real symmetric matrices: Householder reduction to tridiagonal form, then QL with implicit shifts
 * (Golub & Van Loan, Matrix Computations, ch. 8). With vectors: cyclic Jacobi rotations (same chapter), whose small
 * components are accurate, as the derivatives of levels need. Both work in place on arrays the caller owns.
 */

/** Off-diagonal elements, kept between calls; blocks are at most 252 wide. */
const offDiagonal = new Float64Array(256)
const householder = new Float64Array(256)
const image = new Float64Array(256)

/**
 * Writes the ascending eigenvalues of the n × n matrix `a` (rows first; destroyed) to `values[0 … n−1]`.
 */
export const eigenvalues = (a: Float64Array, n: number, values: Float64Array): void => {
  if (n === 1) {
    values[0] = a[0]!
    return
  }
  if (n === 2) {
    const mean = (a[0]! + a[3]!) / 2
    const radius = Math.hypot((a[0]! - a[3]!) / 2, a[1]!)
    values[0] = mean - radius
    values[1] = mean + radius
    return
  }
  tridiagonalise(a, n, values)
  implicitQl(values, offDiagonal, n)
  sortAscending(values, n)
}

const tridiagonalise = (a: Float64Array, n: number, diagonal: Float64Array): void => {
  const v = householder
  const p = image
  for (let k = 0; k < n - 2; k += 1) {
    diagonal[k] = a[k * n + k]!
    let norm2 = 0
    for (let i = k + 1; i < n; i += 1) {
      v[i] = a[i * n + k]!
      norm2 += v[i]! * v[i]!
    }
    const tail = norm2 - v[k + 1]! * v[k + 1]!
    // nothing to reduce; squares near the underflow count as nothing
    if (tail <= 0 || norm2 < 1e-290) {
      offDiagonal[k] = v[k + 1]!
      continue
    }
    const alpha = v[k + 1]! > 0 ? -Math.sqrt(norm2) : Math.sqrt(norm2)
    const scale = 1 / (norm2 - alpha * v[k + 1]!) // 2 / vᵀv
    v[k + 1]! -= alpha
    offDiagonal[k] = alpha
    let along = 0
    for (let i = k + 1; i < n; i += 1) {
      let sum = 0
      for (let j = k + 1; j < n; j += 1) sum += a[i * n + j]! * v[j]!
      p[i] = sum * scale
      along += p[i]! * v[i]!
    }
    const half = (along * scale) / 2
    for (let i = k + 1; i < n; i += 1) p[i]! -= half * v[i]!
    for (let i = k + 1; i < n; i += 1)
      for (let j = k + 1; j <= i; j += 1) {
        const entry = a[i * n + j]! - v[i]! * p[j]! - p[i]! * v[j]!
        a[i * n + j] = entry
        a[j * n + i] = entry
      }
  }
  diagonal[n - 2] = a[(n - 2) * n + n - 2]!
  diagonal[n - 1] = a[(n - 1) * n + n - 1]!
  offDiagonal[n - 2] = a[(n - 1) * n + n - 2]!
  offDiagonal[n - 1] = 0
}

const implicitQl = (d: Float64Array, e: Float64Array, n: number): void => {
  let norm = 0
  for (let i = 0; i < n; i += 1) norm = Math.max(norm, Math.abs(d[i]!) + Math.abs(e[i]!))
  const negligible = 0.01 * Number.EPSILON * norm
  for (let l = 0; l < n; l += 1) {
    for (let sweep = 0; sweep < 60; sweep += 1) {
      let m = l
      while (m < n - 1) {
        const size = Math.abs(d[m]!) + Math.abs(d[m + 1]!)
        if (Math.abs(e[m]!) <= Math.max(Number.EPSILON * size, negligible)) break
        m += 1
      }
      if (m === l) break
      const g0 = (d[l + 1]! - d[l]!) / (2 * e[l]!)
      const r0 = Math.sqrt(g0 * g0 + 1)
      let g = d[m]! - d[l]! + e[l]! / (g0 + (g0 >= 0 ? r0 : -r0))
      let sine = 1
      let cosine = 1
      let shift = 0
      let i = m - 1
      for (; i >= l; i -= 1) {
        const f = sine * e[i]!
        const b = cosine * e[i]!
        const r = Math.sqrt(f * f + g * g)
        e[i + 1] = r
        if (r === 0) {
          d[i + 1]! -= shift
          e[m] = 0
          break
        }
        sine = f / r
        cosine = g / r
        const q = d[i + 1]! - shift
        const t = (d[i]! - q) * sine + 2 * cosine * b
        shift = sine * t
        d[i + 1] = q + shift
        g = cosine * t - b
      }
      if (i >= l) continue
      d[l]! -= shift
      e[l] = g
      e[m] = 0
    }
  }
}

const sortAscending = (values: Float64Array, n: number): void => {
  for (let i = 1; i < n; i += 1) {
    const x = values[i]!
    let j = i - 1
    while (j >= 0 && values[j]! > x) {
      values[j + 1] = values[j]!
      j -= 1
    }
    values[j + 1] = x
  }
}

/**
 * Diagonalises the n × n matrix `a` (rows first). Afterwards `a` holds the eigenvalues on its diagonal and the rows of
 * `vectors` are the orthonormal eigenvectors; both are sorted so that the eigenvalues ascend.
 */
export const eigensystem = (a: Float64Array, n: number, vectors: Float64Array): void => {
  vectors.fill(0, 0, n * n)
  for (let i = 0; i < n; i += 1) vectors[i * n + i] = 1
  for (let sweep = 0; sweep < 50; sweep += 1) {
    let off = 0
    let on = 0
    for (let i = 0; i < n; i += 1) {
      on += a[i * n + i]! * a[i * n + i]!
      for (let j = i + 1; j < n; j += 1) off += a[i * n + j]! * a[i * n + j]!
    }
    // what is left moves an eigenvalue by off²/gap, a vector by 1e-13
    if (off <= 1e-26 * on) break
    for (let p = 0; p < n - 1; p += 1) for (let q = p + 1; q < n; q += 1) rotate(a, vectors, n, p, q)
  }
  // selection sort, n is small
  for (let i = 0; i < n - 1; i += 1) {
    let least = i
    for (let j = i + 1; j < n; j += 1) if (a[j * n + j]! < a[least * n + least]!) least = j
    if (least === i) continue
    const value = a[i * n + i]!
    a[i * n + i] = a[least * n + least]!
    a[least * n + least] = value
    for (let k = 0; k < n; k += 1) {
      const x = vectors[i * n + k]!
      vectors[i * n + k] = vectors[least * n + k]!
      vectors[least * n + k] = x
    }
  }
}

const rotate = (a: Float64Array, vectors: Float64Array, n: number, p: number, q: number): void => {
  const apq = a[p * n + q]!
  if (apq === 0) return
  const theta = (a[q * n + q]! - a[p * n + p]!) / (2 * apq)
  const t = (theta >= 0 ? 1 : -1) / (Math.abs(theta) + Math.sqrt(theta * theta + 1))
  const c = 1 / Math.sqrt(t * t + 1)
  const s = t * c
  a[p * n + p]! -= t * apq
  a[q * n + q]! += t * apq
  a[p * n + q] = 0
  a[q * n + p] = 0
  for (let k = 0; k < n; k += 1) {
    if (k !== p && k !== q) {
      const x = a[k * n + p]!
      const y = a[k * n + q]!
      a[k * n + p] = c * x - s * y
      a[p * n + k] = a[k * n + p]!
      a[k * n + q] = s * x + c * y
      a[q * n + k] = a[k * n + q]!
    }
    const u = vectors[p * n + k]!
    const w = vectors[q * n + k]!
    vectors[p * n + k] = c * u - s * w
    vectors[q * n + k] = s * u + c * w
  }
}
