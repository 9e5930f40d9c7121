/** Whether a component is there at all. */
import type { Selection } from './points.ts'
import type { Solution } from './solveRecipe.ts'
import type { Recipe } from './types.ts'
import { type Uncertainty, uncertaintyOf } from './uncertainty.ts'

/** A component is there when its height exceeds this many standard uncertainties (or times the residuals). */
const HEIGHT_LIMIT = 4

/**
 * Which components are there: higher than the noise, and than what structure in the residuals could feign. Either the height
 * exceeds its uncertainty were the residuals all scatter, or the residuals are small beside it.
 */
export const standing = (
  recipe: Recipe,
  solution: Solution,
  points: Selection,
  repeatability: Uncertainty | null,
  asIfScatter: Uncertainty | null = uncertaintyOf(recipe, solution),
): readonly boolean[] => {
  const rms = rmsOf(solution, points)
  return recipe.components.map((_, k) => {
    const height = solution.at.coefficients[k]!
    const exceeds = (of: Uncertainty | null) => {
      const variance = of?.ofCoefficient(k) ?? null
      return variance === null || height > HEIGHT_LIMIT * Math.sqrt(variance)
    }
    return height > 0 && exceeds(repeatability) && (exceeds(asIfScatter) || height > HEIGHT_LIMIT * rms)
  })
}

/** Root mean square of the residuals, absorbance. */
export const rmsOf = ({ at }: Solution, { weight }: Selection): number =>
  Math.sqrt(at.residuals.reduce((sum, r, i) => sum + (r / weight[i]!) ** 2, 0) / weight.length)
