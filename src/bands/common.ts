/**
 * The objective of a common fit (fitTogether.ts). Separable as in separable.ts, with one column a species: V(α) = Σ ρₖ φₖ, the ratios ρₖ
 * among the parameters of the search (the first band's is 1), a constant, and scatter growing as ν̃⁴. Cost, gradient and Gram matrix are sums over
 * the spectra. Columns of the fit are sums of few of the bands' own; so are their products.
 */
import { fillColumns } from './columns.ts'
import { gramBlock, type Triple } from './gram.ts'
import type { Box, Quadratic } from './levenbergMarquardt.ts'
import { nonNegative } from './nonNegative.ts'
import type { Points } from './separable.ts'
import { backgroundAt } from './shapes.ts'
import { forward } from './symmetric.ts'
import type { RecipeComponent } from './types.ts'

/** Bands of one species; `ratio`: height over that of the first, where the search starts. */
export type Species = readonly (RecipeComponent & { readonly ratio: number })[]

/** One spectrum's linear part: amounts of the species, then the constant and the scatter. */
export interface Part {
  readonly coefficients: Float64Array
  readonly active: readonly number[]
  readonly phiPhi: Float64Array
  readonly phiD: Float64Array
}

export interface Common extends Quadratic {
  readonly parts: readonly Part[]
}

/** A column of the fit: factors of the bands' own columns. */
type Sum = readonly (readonly [column: number, factor: number])[]

/** Parameters of the search, in order: of each band position and width, and the ratio where it is not its species' first. */
export const commonSpace = (species: readonly Species[]): { readonly start: Float64Array; readonly box: Box } => {
  const rows = species.flatMap((bands) =>
    bands.flatMap((band, k) => [
      [band.positionPerCm, ...band.positionBoundsPerCm],
      [band.widthPerCm, ...band.widthBoundsPerCm],
      ...(k === 0 ? [] : [[band.ratio, 0, 1e3]]),
    ]),
  )
  const column = (i: number) => Float64Array.from(rows, (row) => row[i]!)
  return { start: column(0), box: { lower: column(1), upper: column(2) } }
}

/** Where a band's parameters stand in the search: position, then width, then the ratio; -1 where that is held at 1. */
export const placesOf = (
  species: readonly Species[],
): readonly (readonly { readonly at: number; readonly ratioAt: number }[])[] => {
  let next = 0
  return species.map((bands) =>
    bands.map((_, k) => {
      const at = next
      next += k === 0 ? 2 : 3
      return { at, ratioAt: k === 0 ? -1 : at + 2 }
    }),
  )
}

/**
 * The objective for species in spectra, to be minimised over `commonSpace`. `pure`: of each spectrum the only species that it holds; null
 * where it may hold all.
 */
export const common = (
  species: readonly Species[],
  spectra: readonly Points[],
  pure: readonly (number | null)[],
): ((alpha: Float64Array) => Common | null) => {
  const bands = species.flat()
  const places = placesOf(species)
  const n = commonSpace(species).start.length
  const m = species.length + 2
  const constant = 3 * bands.length
  const scatter = constant + 1
  const measured = constant + 2
  const size = constant + 3
  const evaluators = spectra.map((points) => productsOf(bands, points, size))
  const solveLinear = nonNegative(m)
  const signed = species.map(() => false).concat(true, false)

  return (alpha) => {
    const ratio = ({ ratioAt }: { readonly ratioAt: number }) => (ratioAt < 0 ? 1 : alpha[ratioAt]!)
    const flat = places.flat()
    const first = species.map((_, g) => species.slice(0, g).reduce((sum, one) => sum + one.length, 0))
    const linear: readonly Sum[] = [
      ...places.map((own, g) => own.map((place, k) => [3 * (first[g]! + k), ratio(place)] as const)),
      [[constant, 1]],
      [[scatter, 1]],
    ]
    const slopes: Sum[] = Array.from({ length: n }, () => [])
    flat.forEach((place, k) => {
      slopes[place.at] = [[3 * k + 1, ratio(place)]]
      slopes[place.at + 1] = [[3 * k + 2, ratio(place)]]
      if (place.ratioAt >= 0) slopes[place.ratioAt] = [[3 * k, 1]]
    })
    const group = Int32Array.from({ length: n })
    places.forEach((own, g) => {
      for (const { at, ratioAt } of own) {
        group[at] = group[at + 1] = g
        if (ratioAt >= 0) group[ratioAt] = g
      }
    })
    let cost = 0
    const gradient = new Float64Array(n)
    const hessian = new Float64Array(n * n)
    const parts: Part[] = []
    for (const [s, evaluate] of evaluators.entries()) {
      const products = evaluate(flat, alpha)
      const only = pure[s] ?? null
      const isHeld = (i: number) => only !== null && i !== only && i < species.length
      const dot = (a: Sum, b: Sum) =>
        a.reduce((sum, [i, f]) => sum + b.reduce((inner, [j, g]) => inner + f * g * products[i * size + j]!, 0), 0)
      const target: Sum = [[measured, 1]]
      const phiPhi = Float64Array.from(
        linear.flatMap((a, i) => linear.map((b, j) => (isHeld(i) || isHeld(j) ? 0 : dot(a, b)))),
      )
      const right = Float64Array.from(linear, (a, i) => (isHeld(i) ? 0 : dot(a, target)))
      const coefficients = new Float64Array(m)
      const solved = solveLinear(phiPhi, right, signed, coefficients)
      if (!solved) return null
      const { active, factor } = solved
      let square = products[measured * size + measured]!
      for (let i = 0; i < m; i++) {
        square -= 2 * coefficients[i]! * right[i]!
        for (let j = 0; j < m; j++) square += coefficients[i]! * coefficients[j]! * phiPhi[i * m + j]!
      }
      cost += square / 2
      const phiD = Float64Array.from(linear.flatMap((a) => slopes.map((b) => dot(a, b))))
      const held = active.length
      const halves = new Float64Array(n * held)
      for (let a = 0; a < n; a++) {
        const c = coefficients[group[a]!]!
        let pull = dot(slopes[a]!, target)
        active.forEach((i, k) => {
          halves[a * held + k] = phiD[i * n + a]!
          pull -= coefficients[i]! * phiD[i * n + a]!
        })
        gradient[a]! -= c * pull
        forward(factor, halves, a * held)
        for (let b = 0; b <= a; b++) {
          let schur = dot(slopes[a]!, slopes[b]!)
          for (let k = 0; k < held; k++) schur -= halves[a * held + k]! * halves[b * held + k]!
          const value = c * coefficients[group[b]!]! * schur
          hessian[a * n + b]! += value
          if (a !== b) hessian[b * n + a]! += value
        }
      }
      parts.push({ coefficients, active, phiPhi, phiD })
    }
    return Number.isFinite(cost) ? { cost, gradient, hessian, parts } : null
  }
}

/** Where scatter is 1: the middle of the points. cm⁻¹ */
export const scatterMiddle = (x: Float64Array): number => (x[0]! + x[x.length - 1]!) / 2

export const scatterAt = (x: number, middle: number): number =>
  backgroundAt({ kind: 'scatter', exponent: 4 }, middle, x)

/** Products of all columns of one spectrum: of each band value and slopes, then 1, scatter and the measured values, weighted. */
const productsOf = (bands: readonly RecipeComponent[], { x, y, weight }: Points, size: number) => {
  const column = () => new Float64Array(x.length)
  const groups: readonly Triple[] = bands.map(() => [column(), column(), column()])
  const middle = scatterMiddle(x)
  const rest: Triple = [weight, x.map((v, i) => scatterAt(v, middle) * weight[i]!), y.map((v, i) => v * weight[i]!)]
  const products = new Float64Array(size * size)
  const last = size - 3
  gramBlock(rest, rest, products, size, last, last)
  return (places: readonly { readonly at: number }[], alpha: Float64Array): Float64Array => {
    bands.forEach((band, k) => {
      const { at } = places[k]!
      fillColumns(band, alpha[at]!, alpha[at + 1]!, 0, x, weight, groups[k]!)
      for (let l = 0; l <= k; l++) gramBlock(groups[k]!, groups[l]!, products, size, 3 * k, 3 * l)
      gramBlock(groups[k]!, rest, products, size, 3 * k, last)
    })
    return products
  }
}
