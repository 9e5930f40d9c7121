/**
 * A spike is a local extremum far outside the noise that is narrower than any line the instrument could have drawn: a line
 * of full width b (the spectral bandwidth) sampled at spacing h still stands at exp(−4 ln2 (h/b)²) of its height one point
 * away. Masked greedily, the roughest first, each time against neighbours that are not masked yet.
 */
import { lineAt } from './axisFlaws.ts'
import { roughness, roughnessAt, usedPlaces } from './noise.ts'

const TIMES_NOISE = 8
const PASSES = 40
const MAX_GROWTH = 6

/** Marks spikes: 1 where a point is one, or lies between two. `sigma` is the local noise; `stepNm` and `bandwidthNm` in one unit. */
export const findSpikes = (
  x: Float64Array,
  y: Float64Array,
  used: Uint8Array,
  sigma: Float64Array,
  stepNm: number,
  bandwidthNm: number,
): Uint8Array => {
  const n = x.length
  const spike = new Uint8Array(n)
  if (used.reduce((a, b) => a + b, 0) < 15) return spike
  const left = Uint8Array.from(used)
  const shoulder = Math.max(0.15, 0.5 * Math.exp(-4 * Math.LN2 * (stepNm / bandwidthNm) ** 2))
  const reach = Math.max(2, Math.floor(bandwidthNm / (2 * stepNm)) + 1)
  const r = roughness(x, y, left)
  for (let pass = 0; pass < PASSES; pass++) {
    const index = usedPlaces(left)
    const found: number[] = []
    for (let k = 0; k < index.length; k++) {
      const i = index[k]!
      if (Math.abs(r[i]!) < TIMES_NOISE * sigma[i]!) continue
      const near = index.slice(Math.max(0, k - 2), k + 3)
      if (near.some((j) => Math.abs(r[j]!) > Math.abs(r[i]!) || spike[j] === 1)) continue
      if (!isNarrow(y, index, k, reach, shoulder, sigma[i]!)) continue
      spike[i] = 1
      left[i] = 0
      found.push(i)
    }
    if (found.length === 0) break
    lookAgain(x, y, left, found, r)
  }
  return joined(x, y, spike, used, sigma, Math.max(2, Math.round((2 * bandwidthNm) / stepNm)))
}

/** Roughness anew where neighbours were masked; elsewhere it has not changed. */
const lookAgain = (
  x: Float64Array,
  y: Float64Array,
  left: Uint8Array,
  masked: readonly number[],
  r: Float64Array,
): void => {
  const index = usedPlaces(left)
  if (index.length < 5) {
    r.fill(Number.NaN)
    return
  }
  let k = 0
  for (const i of masked) {
    r[i] = Number.NaN
    while (k < index.length && index[k]! < i) k++
    for (let j = Math.max(0, k - 5); j < Math.min(index.length, k + 5); j++) r[index[j]!] = roughnessAt(x, y, index, j)
  }
}

const isNarrow = (
  y: Float64Array,
  index: Int32Array,
  k: number,
  reach: number,
  shoulder: number,
  sigma: number,
): boolean => {
  const at = (j: number) => y[index[Math.min(Math.max(j, 0), index.length - 1)]!]!
  const before = k > 0 ? at(k - 1) : at(k + 1)
  const after = k < index.length - 1 ? at(k + 1) : at(k - 1)
  const base = (at(k - reach) + at(k + reach)) / 2
  const height = at(k) - base
  const up = Math.sign(height)
  if (up * (at(k) - before) < 4 * sigma || up * (at(k) - after) < 4 * sigma) return false
  return Math.min((before - base) / height, (after - base) / height) < shoulder
}

/**
 * What is left between spikes within two bandwidths of each other went with them; from there the place grows over points that miss the
 * line through the eight beyond them by more than the noise; and a shred at an end, shorter than two bandwidths or than the place beside it, is masked too.
 */
const joined = (
  x: Float64Array,
  y: Float64Array,
  spike: Uint8Array,
  used: Uint8Array,
  sigma: Float64Array,
  together: number,
): Uint8Array => {
  const out = Uint8Array.from(spike)
  let last = -Infinity
  for (let i = 0; i < out.length; i++) {
    if (spike[i] === 0) continue
    if (i - last <= together) for (let k = last + 1; k < i; k++) out[k] = used[k]!
    last = i
  }
  for (const order of [[...out.keys()], [...out.keys()].reverse()]) {
    growAlong(order, x, y, out, used, sigma)
    trimEnd(out, used, order, together)
  }
  return out
}

const growAlong = (
  order: readonly number[],
  x: Float64Array,
  y: Float64Array,
  out: Uint8Array,
  used: Uint8Array,
  sigma: Float64Array,
): void => {
  for (let k = 3; k < order.length - 9; k++) {
    // only a place of several spikes has flanks; a single one stands alone
    if (out[order[k]!] === 1 || [1, 2, 3].some((back) => out[order[k - back]!] !== 1)) continue
    for (let grown = 0; grown < MAX_GROWTH && k + grown < order.length - 9; grown++) {
      const i = order[k + grown]!
      const beyond = order.slice(k + grown + 1, k + grown + 9).filter((j) => used[j] === 1 && out[j] === 0)
      if (beyond.length < 8) break
      const missed = Math.abs(y[i]! - lineAt(x, y, beyond, x[i]!))
      if (missed < TIMES_NOISE * sigma[i]!) break
      out[i] = used[i]!
    }
  }
}

const trimEnd = (out: Uint8Array, used: Uint8Array, order: readonly number[], together: number): void => {
  const first = order.findIndex((i) => out[i] === 1)
  if (first < 0) return
  let run = first
  while (run < order.length && out[order[run]!] === 1) run++
  const place = run - first
  if (place >= 3 && first <= Math.max(place, together)) for (const i of order.slice(0, first)) out[i] = used[i]!
}
