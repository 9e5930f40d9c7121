/** Certified values: NIST Statistical Reference Datasets, nonlinear regression (public domain), fixtures/nist. */
import { describe, expect, it } from 'vitest'
import { minimise, type Quadratic } from '../../src/bands/levenbergMarquardt.ts'
import { cholesky, inverse } from '../../src/bands/symmetric.ts'
import { MODELS, type Model, type ReferenceSet, readReferenceSet } from './nist.ts'

const objective =
  (model: Model, { x, y }: ReferenceSet, n: number) =>
  (b: Float64Array): Quadratic => {
    const gradient = new Float64Array(n)
    const hessian = new Float64Array(n * n)
    let cost = 0
    x.forEach((xi, row) => {
      const [value, slope] = model(b, xi)
      const r = value - y[row]!
      cost += (r * r) / 2
      for (let i = 0; i < n; i++) {
        gradient[i]! += slope[i]! * r
        for (let j = 0; j < n; j++) hessian[i * n + j]! += slope[i]! * slope[j]!
      }
    })
    return { cost, gradient, hessian }
  }

const digits = (found: number, certified: number) =>
  -Math.log10(Math.abs(found - certified) / Math.abs(certified) + 1e-16)

describe('the least-squares core meets the certified values of NIST StRD', () => {
  for (const [name, model] of Object.entries(MODELS)) {
    const set = readReferenceSet(name)
    const n = set.certified.length
    const wanted = name === 'Lanczos3' ? [6, 4] : [9, 6]
    set.starts.forEach((start, which) => {
      it(`${name} from start ${which + 1}: ${wanted[0]} digits in parameters, ${wanted[1]} in standard deviations`, () => {
        const box = { lower: new Float64Array(n).fill(-Infinity), upper: new Float64Array(n).fill(Infinity) }
        const tolerances = { relativeChange: 0, gradient: 1e-14, step: 1e-12, iterations: 2000 }
        const found = minimise(objective(model, set, n), Float64Array.from(start), box, tolerances)!
        const variance = (2 * found.at.cost) / (set.x.length - n)
        const covariance = inverse(cholesky(found.at.hessian, n, 0)!)
        const inParameters = set.certified.map((c, i) => digits(found.parameters[i]!, c))
        const inDeviations = set.deviations.map((c, i) => digits(Math.sqrt(variance * covariance[i * n + i]!), c))
        expect(found.stopped).not.toBe('iterations')
        expect(Math.min(...inParameters)).toBeGreaterThan(wanted[0]!)
        expect(Math.min(...inDeviations)).toBeGreaterThan(wanted[1]!)
        expect(digits(2 * found.at.cost, set.sumOfSquares)).toBeGreaterThan(name === 'Lanczos3' ? 6 : 9)
      })
    })
  }
})
