/**
 * Noise, estimated where it stands. Each point is compared with the cubic through its two neighbours on either side
 * (unequal spacing allowed): whatever the curve does up to third order cancels, so the difference r = y − Σ wₖ yₖ is noise
 * alone with variance σ²(1 + Σ wₖ²). In a moving window the root of the mean r², points beyond 3 σ of the median
 * absolute deviation (0.6745 σ in a normal distribution) left out, is robust and nearly as sharp as the plain root mean square: weights that
 * scatter would widen what is fitted with them. Within a window σ is taken to grow with 10^A, the law of a
 * detector of constant noise in transmittance; between windows it is free, since lamps and detectors are not
 * constant: on real spectra σ differs a hundredfold between the middle and the ends.
 */

const MAD_TO_SIGMA = 1.4826
/** Beyond this many σ a point is left out; and the mean square of what is left of a normal distribution, E(z² | |z| < 3). */
const BEYOND = 3
const LEFT_WITHIN = 0.97334
const HALF_WINDOW = 30

/** Smallest noise ever reported, absorbance: keeps weights finite on curves that were computed, not measured. */
export const NOISE_FLOOR = 1e-6

/** Difference from the cubic through the neighbours, scaled to the noise of a single point; NaN where there are too few. */
export const roughness = (x: Float64Array, y: Float64Array, used: Uint8Array): Float64Array => {
  const r = new Float64Array(x.length).fill(Number.NaN)
  const index = usedPlaces(used)
  if (index.length < 5) return r
  for (let k = 0; k < index.length; k++) r[index[k]!] = roughnessAt(x, y, index, k)
  return r
}

/** Places of the points that are used, ascending. */
export const usedPlaces = (used: Uint8Array): Int32Array => {
  const places = new Int32Array(used.length)
  let count = 0
  for (let i = 0; i < used.length; i++) if (used[i] === 1) places[count++] = i
  return places.subarray(0, count)
}

/** The same for the `k`-th of the places in `index`, of which there are at least five. */
export const roughnessAt = (x: Float64Array, y: Float64Array, index: Int32Array, k: number): number => {
  // at the ends the four neighbours stand on one side or unevenly: extrapolation, its variance is in the scale
  const from = Math.min(Math.max(k - 2, 0), index.length - 5)
  const i = index[k]!
  let predicted = 0
  let variance = 1
  for (let a = from; a < from + 5; a++) {
    if (a === k) continue
    const xa = x[index[a]!]!
    let above = 1
    let below = 1
    for (let b = from; b < from + 5; b++) {
      if (b === a || b === k) continue
      const xb = x[index[b]!]!
      above *= x[i]! - xb
      below *= xa - xb
    }
    const w = above / below
    predicted += w * y[index[a]!]!
    variance += w * w
  }
  return (y[i]! - predicted) / Math.sqrt(variance)
}

/** Local standard deviation of every point, never below `floor`. `half` is the half window in points. */
export const localNoise = (
  x: Float64Array,
  y: Float64Array,
  used: Uint8Array,
  floor: Float64Array,
  half: number = HALF_WINDOW,
): Float64Array => {
  const n = x.length
  const r = roughness(x, y, used)
  const index: number[] = []
  for (let i = 0; i < n; i++) if (Number.isFinite(r[i])) index.push(i)
  const noise = new Float64Array(n)
  if (index.length < 5) return noise.map((_, i) => Math.max(floor[i]!, NOISE_FLOOR))
  const width = Math.min(2 * half + 1, index.length)
  const level = new Float64Array(width)
  const scaled = new Float64Array(width)
  const nodes: { at: number; log: number; level: number }[] = []
  const step = Math.max(1, Math.floor(half / 2))
  for (let k = 0; ; k = Math.min(k + step, index.length - 1)) {
    const from = Math.min(Math.max(k - half, 0), index.length - width)
    for (let j = 0; j < width; j++) level[j] = y[index[from + j]!]!
    const middle = median(level)
    for (let j = 0; j < width; j++) {
      const i = index[from + j]!
      scaled[j] = Math.abs(r[i]!) / growth(y[i]! - middle)
    }
    nodes.push({ at: index[k]!, log: Math.log(robustDeviation(scaled) + 1e-300), level: middle })
    if (k === index.length - 1) break
  }
  const smooth = nodes.map((_, j) => meanOf(nodes.slice(Math.max(0, j - 1), j + 2).map((node) => node.log)))
  const local = movingMedian(y, used, 4)
  for (let i = 0, j = 0; i < n; i++) {
    while (j < nodes.length - 2 && nodes[j + 1]!.at <= i) j++
    const a = nodes[j]!
    const b = nodes[Math.min(j + 1, nodes.length - 1)]!
    const t = b.at > a.at ? Math.min(Math.max((i - a.at) / (b.at - a.at), 0), 1) : 0
    const at = (u: number, v: number) => u + t * (v - u)
    const sigma = Math.exp(at(smooth[j]!, smooth[Math.min(j + 1, nodes.length - 1)]!))
    noise[i] = Math.max(sigma * growth(local[i]! - at(a.level, b.level)), floor[i]!, NOISE_FLOOR)
  }
  return noise
}

/** Standard deviation of values about zero, given their sizes. */
const robustDeviation = (sizes: Float64Array): number => {
  const rough = MAD_TO_SIGMA * median(sizes)
  const most = BEYOND * rough
  let sum = 0
  let count = 0
  for (let i = 0; i < sizes.length; i++) {
    if (!(sizes[i]! <= most)) continue
    sum += sizes[i]! * sizes[i]!
    count++
  }
  return count === 0 ? 0 : Math.sqrt(sum / count / LEFT_WITHIN)
}

/** 10^ΔA, held within a factor of ten: one window never explains more than that by absorbance alone. */
const growth = (difference: number): number =>
  Number.isFinite(difference) ? Math.exp(Math.LN10 * Math.min(Math.max(difference, -1), 1)) : 1

/** Median over the used points within `half` places; makes the growth follow the curve, not the noise on it. */
const movingMedian = (y: Float64Array, used: Uint8Array, half: number): Float64Array => {
  const out = new Float64Array(y.length)
  const near = new Float64Array(2 * half + 1)
  for (let i = 0; i < y.length; i++) {
    let count = 0
    for (let k = Math.max(0, i - half); k <= Math.min(y.length - 1, i + half); k++)
      if (used[k] === 1) near[count++] = y[k]!
    out[i] = median(near.subarray(0, count))
  }
  return out
}

/** Up to here sorting by insertion is quicker than the engine's sort. */
const FEW = 64
const scratch = new Float64Array(FEW)

/** Median, of a copy; NaN of nothing. */
export const median = (values: Float64Array): number => {
  const n = values.length
  if (n === 0) return Number.NaN
  const sorted = n <= FEW ? insertionSorted(values) : Float64Array.from(values).sort()
  const half = n >> 1
  return n % 2 === 1 ? sorted[half]! : (sorted[half - 1]! + sorted[half]!) / 2
}

const insertionSorted = (values: Float64Array): Float64Array => {
  for (let i = 0; i < values.length; i++) {
    const v = values[i]!
    let j = i
    // not `>`: a NaN sinks to the end, as the engine's sort has it
    while (j > 0 && !(scratch[j - 1]! <= v)) {
      if (Number.isNaN(v)) break
      scratch[j] = scratch[j - 1]!
      j--
    }
    scratch[j] = v
  }
  return scratch
}

const meanOf = (values: readonly number[]): number => values.reduce((a, b) => a + b, 0) / values.length

/**
 * Reading step of a column that was rounded when it was written (0.001 for three decimals), or 0 where there is none to
 * be seen. Rounding to q leaves a uniform error of standard deviation q/√12, which neighbours that agree do not show.
 */
export const readingStep = (y: Float64Array): number => {
  const seen = Float64Array.from(y.filter((v) => Number.isFinite(v))).sort()
  let step = Infinity
  let largest = 0
  for (let i = 0; i < seen.length; i++) {
    largest = Math.max(largest, Math.abs(seen[i]!))
    const gap = i > 0 ? seen[i]! - seen[i - 1]! : 0
    if (gap > largest * 1e-13 && gap < step) step = gap
  }
  if (!Number.isFinite(step) || step < largest * 1e-9) return 0
  for (const v of seen) if (Math.abs(v / step - Math.round(v / step)) > 0.01) return 0
  return step
}
