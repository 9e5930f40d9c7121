/**
 * Cramér and Rao: no unbiased estimate scatters less than the inverse of the Fisher information, here worked out anew from numerical
 * derivatives of the true curve. The median |error| of a normal estimate that reaches the bound is 0.6745 of it.
 */
import { inverse, Matrix } from 'ml-matrix'
import { chooseRecipe, fitBands } from '../../src/bands/index.ts'
import { findIon } from '../../src/chemistry/ions.ts'
import { solveParameters } from '../../src/ligandField/index.ts'
import { curveOf, gaussianNoise, generator, simulate, type Truth } from './simulated.ts'

const NOISE = 0.001
const MEDIAN = 0.6745

const truthOf = ([p1, w1, h1, p2, w2, h2, constant, scatter]: readonly number[]): Truth => ({
  bands: [
    [p1!, w1!, h1!],
    [p2!, w2!, h2!],
  ],
  constant: constant!,
  scatter: scatter!,
})

/** Smallest standard deviations of the two positions. */
const bound = (parameters: readonly number[], x: Float64Array): readonly [number, number] => {
  const columns = parameters.map((value, k) => {
    const h = 1e-5 * Math.abs(value)
    const shifted = (by: number) => curveOf(truthOf(parameters.map((v, i) => (i === k ? v + by : v))))
    const [up, down] = [shifted(h), shifted(-h)]
    return Array.from(x, (v) => (up(v) - down(v)) / (2 * h) / NOISE)
  })
  // units of like size, or the inverse loses its digits
  const jacobian = new Matrix(columns.map((column, k) => column.map((v) => v * parameters[k]!)))
  const covariance = inverse(jacobian.mmul(jacobian.transpose()))
  return [Math.sqrt(covariance.get(0, 0)) * parameters[0]!, Math.sqrt(covariance.get(3, 3)) * parameters[3]!]
}

const median = (values: readonly number[]): number => values.toSorted((a, b) => a - b)[values.length >> 1]!

export interface Efficiency {
  /** Median |error| over what the bound allows. */
  readonly efficiency: number
  /** Shares of the spectra whose 95 % interval covers the truth. */
  readonly deltaCovered: number
  readonly bCovered: number
  /** Spectra described otherwise than by two bands. */
  readonly unlike: number
}

export const efficiencyOver = (times: number, seed: number): Efficiency => {
  const random = generator(seed)
  const normal = gaussianNoise(random)
  const between = (a: number, b: number) => a + (b - a) * random()
  const cr = findIon('Cr3+')
  if (cr.kind !== 'found') throw new Error('no Cr3+')
  const solve = (positions: readonly [number, number], covariance: readonly (readonly number[])[]) =>
    solveParameters(
      cr.ion,
      'octahedral',
      null,
      positions.map((positionPerCm, k) => ({ role: `nu${k + 1}`, positionPerCm })),
      covariance,
    )
  let unlike = 0
  const ratios: number[] = []
  const covered = { delta: 0, b: 0 }
  for (let i = 0; i < times; i++) {
    const parameters = [
      between(16500, 18500),
      between(3000, 4500),
      between(0.3, 0.8),
      between(23500, 25500),
      between(3000, 4500),
      between(0.3, 0.8),
      between(0.002, 0.02),
      between(0.01, 0.04),
    ]
    const spectrum = simulate(truthOf(parameters), NOISE, normal)
    const choice = chooseRecipe([spectrum], {})
    const fit = choice.kind === 'chosen' ? fitBands(spectrum, choice.recipe, []) : null
    if (fit?.kind !== 'fitted' || fit.components.length !== 2) {
      unlike++
      continue
    }
    const least = bound(parameters, spectrum.wavenumberPerCm)
    const positions = fit.components.map(({ positionPerCm }) => positionPerCm) as [number, number]
    ratios.push(Math.abs(positions[0] - parameters[0]!) / least[0], Math.abs(positions[1] - parameters[3]!) / least[1])
    const found = solve(positions, fit.positionCovariance!)
    const truth = solve([parameters[0]!, parameters[3]!], fit.positionCovariance!)
    if (Math.abs(found.deltaPerCm! - truth.deltaPerCm!) < 1.96 * found.uDeltaPerCm!) covered.delta++
    if (Math.abs(found.bPerCm! - truth.bPerCm!) < 1.96 * found.uBPerCm!) covered.b++
  }
  const counted = times - unlike
  return {
    efficiency: median(ratios) / MEDIAN,
    deltaCovered: covered.delta / counted,
    bCovered: covered.b / counted,
    unlike,
  }
}
