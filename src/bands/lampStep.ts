/**
 * A step where the lamp or the detector changes, as one more background term. Its place is where a column of 0 below and 1 above would
 * take most of the residuals away: with r the residuals and J the Jacobian, a column s gains (sᵀr)²/(sᵀs − sᵀJ (JᵀJ)⁻¹ Jᵀs) of χ², and all
 * the products of s are sums over the points above its place. The place belongs to the recipe, the height to each spectrum.
 */
import { fillColumns } from './columns.ts'
import type { Triple } from './gram.ts'
import { joinNeighbours, reweigh, type Selection } from './points.ts'
import { backgroundAt, scatterOrigin } from './shapes.ts'
import { solveRecipe } from './solveRecipe.ts'
import { cholesky, forward } from './symmetric.ts'
import type { Recipe } from './types.ts'

const JOINED = 100
/** χ² that a step must gain in all spectra together: it may stand at hundreds of places. */
const LEAST_GAIN = 30
/** Share of the spread of the absorbance. */
const LARGE_MISFIT = 0.02
/** A step nearer to the ends is a few bad points. */
const FEWEST_POINTS = 12

/**
 * Where a step may stand that the recipe lacks; null where none is worth the trial. Real bands have structure that would feed a step anywhere:
 * where the recipe is far from the noise only spectra that were `flagged` to have a step are tried.
 */
export const placeOfStep = (recipe: Recipe, points: readonly Selection[], flagged: boolean): number | null => {
  const misfit = recipe.misfit ?? 0
  if (misfit > LARGE_MISFIT && !flagged) return null
  // a step shows among few points too; its very place does not
  const few = bestPlace(
    recipe,
    points.map((selection) => joinNeighbours(selection, misfit, JOINED)),
  )
  if (few === null || few.gain < LEAST_GAIN / 2) return null
  const place = bestPlace(
    recipe,
    points.map((selection) => reweigh(selection, misfit)),
  )
  return place === null || place.gain < LEAST_GAIN ? null : place.atPerCm
}

interface StepPlace {
  readonly atPerCm: number
  readonly gain: number
}

const bestPlace = (recipe: Recipe, points: readonly Selection[]): StepPlace | null => {
  const gains = points.map((selection) => gainsOf(recipe, selection))
  const [first] = gains
  if (!first || gains.some((gain) => gain === null)) return null
  let best: StepPlace | null = null
  const { x } = points[0]!
  for (let i = FEWEST_POINTS; i < x.length - FEWEST_POINTS; i++) {
    const atPerCm = (x[i - 1]! + x[i]!) / 2
    // other spectra may be sampled otherwise: their gain at the nearest place
    const gain = gains.reduce((sum, own, s) => sum + (s === 0 ? own![i]! : own![indexAbove(points[s]!.x, atPerCm)]!), 0)
    if (best === null || gain > best.gain) best = { atPerCm, gain }
  }
  return best
}

const indexAbove = (x: Float64Array, value: number): number => {
  let [low, high] = [0, x.length - 1]
  while (low < high) {
    const middle = (low + high) >> 1
    if (x[middle]! > value) high = middle
    else low = middle + 1
  }
  return low
}

/** What a step below each point would gain; null where the recipe can't be solved. */
const gainsOf = (recipe: Recipe, points: Selection): Float64Array | null => {
  const solution = solveRecipe(recipe, points)
  if (!solution) return null
  const { x, weight } = points
  const jacobian = jacobianOf(recipe, solution, points)
  const p = jacobian.length
  const gram = new Float64Array(p * p)
  jacobian.forEach((a, i) => {
    jacobian.forEach((b, j) => {
      gram[i * p + j] = a.reduce((sum, v, k) => sum + v * b[k]!, 0)
    })
  })
  const factor = cholesky(gram, p, 1e-13)
  if (!factor) return null
  const above = new Float64Array(p)
  const half = new Float64Array(p)
  const gains = new Float64Array(x.length)
  let [residual, square] = [0, 0]
  for (let i = x.length - 1; i > 0; i--) {
    const w = weight[i]!
    residual += w * solution.at.residuals[i]!
    square += w * w
    for (let k = 0; k < p; k++) above[k]! += w * jacobian[k]![i]!
    half.set(above)
    forward(factor, half)
    const own = half.reduce((sum, v) => sum + v * v, 0)
    const left = square - own
    gains[i] = left > 1e-6 * square ? (residual * residual) / left : 0
  }
  return gains
}

/** Weighted columns of everything that is fitted and not held at zero. */
const jacobianOf = (
  { components, background, windowPerCm }: Recipe,
  { at, parameters }: NonNullable<ReturnType<typeof solveRecipe>>,
  { x, weight }: Selection,
): readonly Float64Array[] => {
  const origin = scatterOrigin({ windowPerCm })
  const bands = components.flatMap((component, k) => {
    if (!(at.coefficients[k]! > 0)) return []
    const columns: Triple = [new Float64Array(x.length), new Float64Array(x.length), new Float64Array(x.length)]
    fillColumns(component, parameters[2 * k]!, parameters[2 * k + 1]!, windowPerCm[1], x, weight, columns)
    return columns
  })
  const behind = background.flatMap((term, k) =>
    at.coefficients[components.length + k] === 0 ? [] : [x.map((v, i) => backgroundAt(term, origin, v) * weight[i]!)],
  )
  return [...bands, ...behind]
}
