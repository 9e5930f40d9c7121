/**
 * How far a recipe is off beyond noise: s with Σ r²/(noise² + s²) = n − p, after Paule and Mandel (J. Res. NBS 87 (1982) 377),
 * who find the variance between laboratories so. Residuals and weights depend on each other: a few rounds.
 */
import { reweigh, type Selection } from './points.ts'
import { ROUGH, solveRecipe } from './solveRecipe.ts'
import type { Recipe } from './types.ts'

const ROUNDS = 3
/** A point counts no more than this in Σ r²/σ²: a spike or a lost stretch of lamp is not the recipe's misfit. */
const OUTLIER = 9

/** Share of the spread of the absorbance, averaged over the spectra; 0 where noise explains the residuals. */
export const findMisfit = (recipe: Recipe, spectra: readonly Selection[]): number => {
  let misfit = 0
  for (let round = 0; round < ROUNDS; round++) {
    let square = 0
    for (const points of spectra) {
      const weighted = reweigh(points, misfit)
      const solution = solveRecipe(recipe, weighted, ROUGH)
      if (!solution) return misfit
      const freedom = points.x.length - 3 * recipe.components.length - recipe.background.length
      const variances = solution.at.residuals.map((r, i) => (r / weighted.weight[i]!) ** 2)
      square += excessVariance(variances, points.noise, freedom) / points.spread ** 2 / spectra.length
    }
    const next = Math.sqrt(square)
    const settled = Math.abs(next - misfit) <= 0.05 * next
    misfit = next
    if (settled) break
  }
  return misfit
}

/** s² ≥ 0 by bisection; 0 where χ² is within three standard deviations of what noise gives. */
const excessVariance = (squares: Float64Array, noise: Float64Array, freedom: number): number => {
  const chi2 = (variance: number) =>
    squares.reduce((sum, r2, i) => sum + Math.min(OUTLIER, r2 / (noise[i]! ** 2 + variance)), 0)
  if (freedom <= 0 || chi2(0) <= freedom + 3 * Math.sqrt(2 * freedom)) return 0
  let low = 0
  let high = squares.reduce((sum, r2) => sum + r2, 0) / freedom
  for (let round = 0; round < 40; round++) {
    const middle = (low + high) / 2
    if (chi2(middle) > freedom) low = middle
    else high = middle
  }
  return (low + high) / 2
}
