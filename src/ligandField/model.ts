/**
 * Band positions as functions of p = (Δ, B, C), with their derivatives. The derivative of a level by a parameter is the
 * expectation value of that parameter's matrix, ∂E/∂pₖ = vᵀ Mₖ v (Hellmann–Feynman), so one diagonalisation gives both.
 */
import { type Block, blocksOf } from './blocks.ts'
import { eigensystem } from './eigen.ts'
import { sumBlock } from './levels.ts'
import type { Term, TermScheme, Transition } from './terms.ts'

export interface BandModel {
  readonly scheme: TermScheme
  /** Number of bands. */
  readonly count: number
  /** Which of the scheme's transitions they are. */
  readonly columns: readonly number[]
  /** Writes positions (cm⁻¹, from the ground term) and derivatives by Δ, B, C (rows of three) at (Δ, B, C). */
  readonly evaluate: (delta: number, b: number, c: number, positions: Float64Array, derivatives: Float64Array) => void
}

/** A root of a block and what it adds to which band. */
interface Share {
  readonly root: number
  readonly band: number
  readonly weight: number
}

const work = new Float64Array(16 * 16)
const vectors = new Float64Array(16 * 16)

const dimensionOf = (blocks: readonly Block[], term: Term): number => blockOf(blocks, term).dimension

const blockOf = (blocks: readonly Block[], term: Term): Block =>
  blocks.find(({ multiplicity, irrep }) => multiplicity === term.multiplicity && irrep === term.irrep)!

/** The positions of these transitions. A band of several terms is their mean, weighted by degeneracy. */
export const bandModel = (scheme: TermScheme, transitions: readonly Transition[]): BandModel => {
  const blocks = blocksOf(scheme.d, 'O')
  const shares = new Map<Block, Share[]>()
  const add = (term: Term, band: number, weight: number): void => {
    const block = blockOf(blocks, term)
    shares.set(block, [...(shares.get(block) ?? []), { root: term.index - 1, band, weight }])
  }
  transitions.forEach(({ upper }, band) => {
    const total = upper.reduce((sum, term) => sum + dimensionOf(blocks, term), 0)
    for (const term of upper) add(term, band, dimensionOf(blocks, term) / total)
    add(scheme.ground, band, -1)
  })
  const list = [...shares]
  const side = scheme.geometry === 'tetrahedral' ? -1 : 1
  const parameters = [0, 0, 0]
  const evaluate: BandModel['evaluate'] = (delta, b, c, positions, derivatives) => {
    positions.fill(0)
    derivatives.fill(0)
    parameters[0] = side * delta
    parameters[1] = b
    parameters[2] = c
    for (const [block, parts] of list) {
      const n = block.size
      sumBlock(block, parameters, work)
      eigensystem(work, n, vectors)
      for (const { root, band, weight } of parts) {
        positions[band]! += weight * work[root * n + root]!
        for (let k = 0; k < 3; k += 1) {
          const slope = expectation(block.matrices[k]!, vectors, root * n, n)
          derivatives[band * 3 + k]! += weight * (k === 0 ? side * slope : slope)
        }
      }
    }
  }
  const columns = transitions.map((transition) => scheme.transitions.indexOf(transition))
  return { scheme, count: transitions.length, columns, evaluate }
}

const expectation = (matrix: Float64Array, v: Float64Array, at: number, n: number): number => {
  let sum = 0
  for (let i = 0; i < n; i += 1) {
    let row = 0
    for (let j = 0; j < n; j += 1) row += matrix[i * n + j]! * v[at + j]!
    sum += v[at + i]! * row
  }
  return sum
}

/** Directions of a scan: Δ : B = u : (1 − u)/10 with u = 1/STEPS … (STEPS − 1)/STEPS, so Δ/B from 0.05 to 1900. */
export const STEPS = 192

export const direction = (i: number): readonly [delta: number, b: number] => [i / STEPS, (1 - i / STEPS) / 10]

const scans = new WeakMap<TermScheme, Map<string, Float64Array>>()

/** Positions of all transitions of a scheme along the directions at one C/B, a row each; kept, whatever bands are asked. */
export const scanOf = (scheme: TermScheme, cOverB: number): Float64Array => {
  const ofScheme = scans.get(scheme) ?? new Map<string, Float64Array>()
  scans.set(scheme, ofScheme)
  const key = cOverB.toFixed(3)
  const known = ofScheme.get(key)
  if (known !== undefined) return known
  const { count, evaluate } = bandModel(scheme, scheme.transitions)
  const table = new Float64Array((STEPS - 1) * count)
  const slopes = new Float64Array(count * 3)
  for (let i = 1; i < STEPS; i += 1) {
    const [delta, b] = direction(i)
    evaluate(delta, b, cOverB * b, table.subarray((i - 1) * count, i * count), slopes)
  }
  if (ofScheme.size > 32) ofScheme.clear()
  ofScheme.set(key, table)
  return table
}
