/**
 * Several spectra fitted together, as mixtures: each species is a sum of bands that keep their positions, widths and ratios of height in
 * all spectra; each spectrum has an amount ≥ 0 of every species, a constant and scatter. One band a species is the fit of a series with
 * shared positions and widths, heights free.
 */
import type { Spectrum } from '../spectrum/types.ts'
import {
  type Common,
  common,
  commonSpace,
  type Part,
  placesOf,
  type Species,
  scatterAt,
  scatterMiddle,
} from './common.ts'
import { freeParameters, type Minimum, minimise } from './levenbergMarquardt.ts'
import { disorder, joinNeighbours, reweigh, type Selection, selectPoints } from './points.ts'
import { bandAt } from './shapes.ts'
import { cholesky, inverse, submatrix } from './symmetric.ts'
import type { Amounts, CommonFit, SharedBand } from './types.ts'
import { correlationTime } from './uncertainty.ts'

const JOINED = 240
const TOLERANCES = { relativeChange: 1e-7, gradient: 1e-7, step: 1e-7, iterations: 200 }
/** The model's misfit and the weights depend on each other. */
const ROUNDS = 3

/**
 * `species`: the bands of each, where the search starts and its bounds. Points outside the window (vacuum, cm⁻¹) are left out. Shares the
 * limits of fitBands: outcome `unfitted` where a spectrum is in disorder or too few points are left.
 */
export const fitTogether = (
  spectra: readonly Spectrum[],
  species: readonly Species[],
  windowPerCm: readonly [number, number],
  pure: readonly (number | null)[] = [],
): CommonFit => {
  const faulty = spectra.map(disorder).find((fault) => fault !== null)
  if (faulty) return { kind: 'unfitted', why: `A spectrum can't be fitted: ${faulty}.` }
  const points = spectra.map((spectrum) => joinNeighbours(selectPoints(spectrum, windowPerCm, 0), 0, JOINED))
  const { start, box } = commonSpace(species)
  const count = points.reduce((sum, { x }) => sum + x.length, 0)
  const freedom = count - start.length - points.length * (species.length + 2)
  if (spectra.length === 0 || points.some(({ x }) => x.length <= species.length + 2) || freedom <= 0)
    return { kind: 'unfitted', why: 'Too few points are left to tell the species apart.' }
  let misfit = 0
  let found = null as Minimum<Common> | null
  let weighted = points
  for (let round = 0; round < ROUNDS; round++) {
    weighted = points.map((selection) => reweigh(selection, misfit))
    found = minimise(common(species, weighted, pure), found?.parameters ?? start, box, TOLERANCES)
    if (!found) return { kind: 'unfitted', why: 'The species can’t be told apart in these spectra.' }
    const next = misfitOf(found, species, points, freedom)
    if (Math.abs(next - misfit) <= 0.05 * next) break
    misfit = next
  }
  return described(found!, species, weighted, misfit, freedom)
}

const residualsOf = (
  found: Minimum<Common>,
  species: readonly Species[],
  { x, y }: Selection,
  s: number,
): Float64Array => {
  const { coefficients } = found.at.parts[s]!
  const places = placesOf(species)
  const p = found.parameters
  const middle = scatterMiddle(x)
  return y.map((value, i) => {
    let rest = value - coefficients[species.length]! - coefficients[species.length + 1]! * scatterAt(x[i]!, middle)
    species.forEach((bands, g) => {
      bands.forEach(({ shape }, k) => {
        const { at, ratioAt } = places[g]![k]!
        rest -= coefficients[g]! * (ratioAt < 0 ? 1 : p[ratioAt]!) * bandAt(shape, p[at]!, p[at + 1]!, x[i]!)
      })
    })
    return rest
  })
}

/** Share of the spread of the absorbance that, added to the noise, explains the residuals; 0 where noise alone does. */
const misfitOf = (
  found: Minimum<Common>,
  species: readonly Species[],
  points: readonly Selection[],
  freedom: number,
): number => {
  const squares = points.flatMap((selection, s) =>
    Array.from(residualsOf(found, species, selection, s), (r, i) => ({
      square: r * r,
      noise: selection.noise[i]! ** 2,
      spread: selection.spread ** 2,
    })),
  )
  const chi2 = (share: number) =>
    squares.reduce((sum, { square, noise, spread }) => sum + square / (noise + share * share * spread), 0)
  if (chi2(0) <= freedom + 3 * Math.sqrt(2 * freedom)) return 0
  let [low, high] = [0, 1]
  for (let round = 0; round < 40; round++) {
    const middle = (low + high) / 2
    if (chi2(middle) > freedom) low = middle
    else high = middle
  }
  return (low + high) / 2
}

const described = (
  found: Minimum<Common>,
  species: readonly Species[],
  points: readonly Selection[],
  misfit: number,
  freedom: number,
): CommonFit => {
  const { at, parameters, iterations, stopped } = found
  const n = parameters.length
  const residuals = points.map((selection, s) => residualsOf(found, species, selection, s))
  const tau = Math.max(...residuals.map((one, s) => correlationTime(one.map((r, i) => r * points[s]!.weight[i]!))))
  const scale = ((2 * at.cost) / freedom) * tau
  const free = freeParameters(parameters, at.gradient, commonSpace(species).box).filter(
    (i) => at.hessian[i * n + i]! > 0,
  )
  const factor = cholesky(submatrix(at.hessian, n, free), free.length)
  const covariance = factor && inverse(factor)
  const u = (i: number): number | null => {
    const k = free.indexOf(i)
    return k < 0 || !covariance ? null : Math.sqrt(covariance[k * free.length + k]! * scale)
  }
  const shared = placesOf(species).map((places, g) =>
    places.map(
      ({ at: i, ratioAt }, k): SharedBand => ({
        shape: species[g]![k]!.shape,
        positionPerCm: parameters[i]!,
        uPositionPerCm: u(i),
        widthPerCm: parameters[i + 1]!,
        uWidthPerCm: u(i + 1),
        ratio: ratioAt < 0 ? 1 : parameters[ratioAt]!,
      }),
    ),
  )
  return {
    kind: 'fitted',
    species: shared,
    spectra: at.parts.map((part, s) => amountsOf(part, species, scale, residuals[s]!)),
    misfit,
    reducedChi2: (2 * at.cost) / freedom,
    iterations,
    stopped,
  }
}

/** Amounts, and how well they are known were the shared bands exact: what these are off by is common to all spectra and leaves ratios as they are. */
const amountsOf = (
  { coefficients, active, phiPhi }: Part,
  species: readonly Species[],
  scale: number,
  residuals: Float64Array,
): Amounts => {
  const factor = cholesky(submatrix(phiPhi, coefficients.length, active), active.length)!
  const own = inverse(factor)
  const u = (g: number): number => {
    const k = active.indexOf(g)
    return k < 0 ? 0 : Math.sqrt(own[k * active.length + k]! * scale)
  }
  return {
    amounts: Array.from(coefficients.subarray(0, species.length)),
    uAmounts: species.map((_, g) => u(g)),
    constant: coefficients[species.length]!,
    scatter: coefficients[species.length + 1]!,
    rms: Math.sqrt(residuals.reduce((sum, r) => sum + r * r, 0) / residuals.length),
  }
}
