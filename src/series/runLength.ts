/**
 * Average run lengths (ARL) of control charts of independent normal values with known target and σ: how many points a
 * chart runs, on average, until it signals. `shift` is that of the mean, in σ; 0 gives the run length between false alarms.
 *
 * Shewhart, one point beyond Lσ: 1/p, p = Φ(−L − δ) + Φ(−L + δ).
 *
 * EWMA (S. V. Crowder, Technometrics 29 (1987) 401, from memory): with z the newest average and c the half width,
 *
 *     ARL(z) = 1 + ∫ ARL(y) φ((y − (1 − λ) z)/λ − δ)/λ dy over −c … c.
 *
 * One-sided CUSUM (E. S. Page, Biometrika 41 (1954) 100, from memory): with s the sum so far,
 *
 *     ARL(s) = 1 + ARL(0) Φ(k − s − δ) + ∫ ARL(y) φ(y + k − s − δ) dy over 0 … h;
 *
 * both sides together, started at zero: 1/ARL = 1/ARL⁺ + 1/ARL⁻ (K. W. Kemp, from memory). Both equations are solved at the
 * nodes of Gauss–Legendre quadrature (Nyström). The kernel is as narrow as λ (or 1), so the number of nodes follows
 * the range over it.
 */
import jstat from 'jstat'
import type { ChartDesign } from './chart.ts'

const cumulative = (x: number): number => jstat.normal.cdf(x, 0, 1)
const density = (x: number): number => Math.exp(-x * x * 0.5) / Math.sqrt(2 * Math.PI)

/** Mean number of points until a chart of this design signals; null for Shewhart tests by name, which have no closed form here. */
export const averageRunLength = (design: ChartDesign, shift = 0): number | null => {
  switch (design.chart) {
    case 'shewhart':
      return design.tests.length > 0 ? null : shewhartRunLength(design.l, shift)
    case 'ewma':
      return ewmaRunLength(design.lambda, design.l, shift)
    case 'cusum':
      return cusumRunLength(design.k, design.h, shift)
  }
}

/** One point beyond `l` σ. */
export const shewhartRunLength = (l: number, shift = 0): number => 1 / (cumulative(-l - shift) + cumulative(-l + shift))

/** Two-sided tabular CUSUM, both sums starting at zero. */
export const cusumRunLength = (k: number, h: number, shift = 0): number =>
  1 / (1 / oneSidedCusumRunLength(k, h, shift) + 1 / oneSidedCusumRunLength(k, h, -shift))

/** The sum that looks for a shift upwards. */
export const oneSidedCusumRunLength = (k: number, h: number, shift = 0): number => {
  const { nodes, weights } = quadrature(0, h, nodesFor(h))
  const n = nodes.length
  // the sum rests at zero with a finite probability: zero is one more unknown, with the part below as its weight
  const from = [0, ...nodes]
  const rows = from.map((s) => [
    -cumulative(k - s - shift),
    ...nodes.map((y, j) => -weights[j]! * density(y + k - s - shift)),
  ])
  for (let i = 0; i <= n; i++) rows[i]![i]! += 1
  return solve(rows, new Array<number>(n + 1).fill(1))[0]!
}

export interface EwmaLimits {
  /** `varying`: limits that widen with the points taken in, as the chart draws them. `steady`: those of ever after. */
  readonly limits: 'varying' | 'steady'
}

/** Two-sided EWMA that starts at its target. */
export const ewmaRunLength = (lambda: number, l: number, shift = 0, { limits }: EwmaLimits = { limits: 'varying' }) => {
  const half = (i: number): number => l * Math.sqrt((lambda / (2 - lambda)) * (1 - (1 - lambda) ** (2 * i)))
  const kernel = (y: number, z: number): number => density((y - (1 - lambda) * z) / lambda - shift) / lambda
  const steady = half(Infinity)
  const n = nodesFor((2 * steady) / lambda)
  let { nodes, weights } = quadrature(-steady, steady, n)
  const rows = nodes.map((z) => nodes.map((y, j) => -weights[j]! * kernel(y, z)))
  for (let i = 0; i < n; i++) rows[i]![i]! += 1
  let ahead = solve(rows, new Array<number>(n).fill(1))
  const at = (z: number): number => ahead.reduce((sum, a, j) => sum + weights[j]! * kernel(nodes[j]!, z) * a, 1)
  // backwards from where the limits have settled: ahead of point i lies what the limits of point i + 1 leave
  const settled = limits === 'steady' ? 0 : Math.ceil(Math.log(SETTLED) / (2 * Math.log1p(-Math.min(lambda, 0.999))))
  for (let i = settled; i >= 1; i--) {
    const inner = quadrature(-half(i), half(i), n)
    const before = inner.nodes.map(at)
    ;({ nodes, weights } = inner)
    ahead = before
  }
  return at(0)
}

/** Part by which the limits are below their final width when they count as settled. */
const SETTLED = 1e-5

const nodesFor = (range: number): number => Math.min(120, Math.max(24, Math.ceil(4 * range)))

/** Nodes and weights of Gauss–Legendre quadrature between two bounds, by Newton's method on the Legendre polynomial. */
const quadrature = (low: number, high: number, n: number) => {
  const nodes: number[] = []
  const weights: number[] = []
  for (let i = 0; i < n; i++) {
    let x = Math.cos((Math.PI * (i + 0.75)) / (n + 0.5))
    let slope = 1
    for (let turn = 0; turn < 20; turn++) {
      let [p, before] = [1, 0]
      for (let k = 1; k <= n; k++) [p, before] = [((2 * k - 1) * x * p - (k - 1) * before) / k, p]
      slope = (n * (x * p - before)) / (x * x - 1)
      const step = p / slope
      x -= step
      if (Math.abs(step) < 1e-15) break
    }
    nodes.push((low + high) / 2 + (x * (high - low)) / 2)
    weights.push((high - low) / ((1 - x * x) * slope * slope))
  }
  return { nodes, weights }
}

/** Solution of a small linear system by elimination with row pivots. Both arguments are used up. */
const solve = (rows: number[][], right: number[]): number[] => {
  const n = right.length
  for (let k = 0; k < n; k++) {
    let best = k
    for (let i = k + 1; i < n; i++) if (Math.abs(rows[i]![k]!) > Math.abs(rows[best]![k]!)) best = i
    ;[rows[k], rows[best]] = [rows[best]!, rows[k]!]
    ;[right[k], right[best]] = [right[best]!, right[k]!]
    for (let i = k + 1; i < n; i++) {
      const factor = rows[i]![k]! / rows[k]![k]!
      if (factor === 0) continue
      for (let j = k; j < n; j++) rows[i]![j]! -= factor * rows[k]![j]!
      right[i]! -= factor * right[k]!
    }
  }
  for (let k = n - 1; k >= 0; k--) {
    for (let j = k + 1; j < n; j++) right[k]! -= rows[k]![j]! * right[j]!
    right[k]! /= rows[k]![k]!
  }
  return right
}
