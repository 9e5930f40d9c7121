/** A recipe solved on points: first on few, neighbours joined, where most of the way is gone; then on all. */
import { type Minimum, minimise, type Tolerances } from './levenbergMarquardt.ts'
import { joined } from './points.ts'
import { type Points, type Separated, separable } from './separable.ts'
import { searchSpace } from './shapes.ts'
import type { Recipe } from './types.ts'

export interface Solution extends Minimum<Separated> {
  /** Σ (r/σ)² */
  readonly chi2: number
}

const APPROACH: Tolerances = { relativeChange: 1e-3, gradient: 1e-4, step: 1e-5, iterations: 40 }
/** Enough to tell recipes apart: a change of 10⁻⁴ of χ² is far below a point of score. */
export const ROUGH: Tolerances = { relativeChange: 1e-4, gradient: 1e-5, step: 1e-6, iterations: 50 }
/** Enough to tell which starts deserve another. */
export const FIRST_LOOK: Tolerances = { relativeChange: 1e-2, gradient: 1e-3, step: 1e-4, iterations: 20 }
const FINAL: Tolerances = { relativeChange: 1e-9, gradient: 1e-9, step: 1e-9, iterations: 100 }
/** λ after the approach. */
const NEARLY_THERE = 1e-6
/** The approach joins neighbours within this share of the narrowest width that a component starts from. */
const SPAN = 1 / 12
/** Less than this is not worth an approach. */
const FEWER_BY = 1.5

/** Null where the model can't be evaluated at all. */
export const solveRecipe = (recipe: Recipe, points: Points, tolerances: Tolerances = FINAL): Solution | null => {
  const space = searchSpace(recipe)
  let from = space.start
  let iterations = 0
  let settings: Tolerances = tolerances
  const narrowest = recipe.components.reduce((least, { widthPerCm }) => Math.min(least, widthPerCm), Infinity)
  const few = joined(points, SPAN * narrowest)
  if (few.x.length * FEWER_BY < points.x.length) {
    const approach = minimise(separable(recipe, few), from, space.box, APPROACH)
    if (approach) {
      from = approach.parameters
      iterations = approach.iterations
      settings = { ...tolerances, damping: NEARLY_THERE }
    }
  }
  const found = minimise(separable(recipe, points), from, space.box, settings)
  return found && { ...found, iterations: iterations + found.iterations, chi2: 2 * found.at.cost }
}
