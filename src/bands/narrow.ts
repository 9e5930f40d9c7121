/**
 * Narrow features on a broad band: spin-forbidden transitions that hardly change the bond lengths. They are no part of the search
 * for broad bands; where the species names one the search leaves out its stretch. Added to the recipe when it is chosen, where they stand above the noise.
 */
import { recipeName } from './candidates.ts'
import { localPolynomial } from './localPolynomial.ts'
import { findMisfit } from './misfit.ts'
import { reweigh, type Selection, withoutStretch } from './points.ts'
import { NARROWEST_PER_CM } from './seeds.ts'
import { FOUR_LN2, GAUSSIAN } from './shapes.ts'
import { rested } from './shaping.ts'
import { solveRecipe } from './solveRecipe.ts'
import { standing } from './standing.ts'
import type { BandHint, Recipe, RecipeComponent } from './types.ts'
import { repeatabilityOf } from './uncertainty.ts'

/** Full widths at half maximum: from what a spectrometer of 1 nm resolves to the narrowest broad band. cm⁻¹ */
const WIDTHS_PER_CM = [30, NARROWEST_PER_CM] as const
const USUAL_WIDTH_PER_CM = 250
/** Features that the spectra alone ask for, at most. */
const MOST = 3
/** Curvature of the residuals counts from this many standard uncertainties. */
const SIGNIFICANT = 6
const FEWEST_POINTS = 7

/** The points that tell the broad bands: a stretch about each narrow feature left out. */
export const besideNarrow = (points: Selection, hints: readonly BandHint[]): Selection =>
  hints.reduce((left, { positionPerCm, withinPerCm }) => {
    const reach = withinPerCm + USUAL_WIDTH_PER_CM
    return withoutStretch(left, [positionPerCm - reach, positionPerCm + reach])
  }, points)

/**
 * The recipe with the narrow features that the species names, and with those that the spectra demand: only where the recipe reaches the
 * noise with them, since real bands have structure enough to feed any number.
 */
export const withNarrow = (recipe: Recipe, hints: readonly BandHint[], points: readonly Selection[]): Recipe => {
  const named = hints.reduce((current, hint) => withStanding(current, atHint(hint), points), recipe)
  const misfit = findMisfit(named, points)
  if (misfit === 0) return named
  let demanded = named
  for (let round = 0; round < MOST; round++) {
    const seed = strongestResidual(demanded, points)
    const more = seed === null ? demanded : withStanding(demanded, seed, points)
    if (more === demanded) break
    demanded = more
    if (findMisfit(demanded, points) === 0) return demanded
  }
  return named
}

const component = (positionPerCm: number, withinPerCm: number, widthPerCm: number): RecipeComponent => ({
  shape: GAUSSIAN,
  kind: 'band',
  narrow: true,
  positionPerCm,
  positionBoundsPerCm: [positionPerCm - withinPerCm, positionPerCm + withinPerCm],
  widthPerCm,
  widthBoundsPerCm: WIDTHS_PER_CM,
})

const atHint = ({ positionPerCm, withinPerCm }: BandHint): RecipeComponent =>
  component(positionPerCm, Math.max(withinPerCm, WIDTHS_PER_CM[0]), USUAL_WIDTH_PER_CM)

/** The recipe with one component more, in its place by position. */
export const withComponent = (recipe: Recipe, added: RecipeComponent): Recipe => {
  const components = [...recipe.components, added].sort((a, b) => rank(a) - rank(b))
  return { ...recipe, components, name: recipeName(components, recipe.background) }
}

/** Flanks stand last. */
const rank = ({ kind, positionPerCm }: RecipeComponent): number => (kind === 'flank' ? Infinity : positionPerCm)

/** With the feature where it stands above the noise in most of the spectra; else the recipe as it was. */
const withStanding = (recipe: Recipe, added: RecipeComponent, points: readonly Selection[]): Recipe => {
  const trial = rested(withComponent(recipe, added), points)
  const k = trial.components.findIndex(({ positionBoundsPerCm }) => positionBoundsPerCm === added.positionBoundsPerCm)
  const weighted = { ...trial, misfit: findMisfit(trial, points) }
  const stands = points.filter((selection) => {
    const own = reweigh(selection, weighted.misfit)
    const solution = solveRecipe(weighted, own)
    return solution !== null && standing(weighted, solution, own, repeatabilityOf(weighted, solution, own))[k]
  })
  return 2 * stands.length > points.length ? trial : recipe
}

/** Where the residuals of the first spectrum bend most, at the scale of a narrow feature. */
const strongestResidual = (recipe: Recipe, points: readonly Selection[]): RecipeComponent | null => {
  const selection = points[0]!
  const solution = solveRecipe(recipe, selection)
  if (!solution) return null
  const residual = { ...selection, y: solution.at.residuals.map((r, i) => r / selection.weight[i]!) }
  let best: { readonly positionPerCm: number; readonly reachPerCm: number; readonly times: number } | null = null
  for (const reachPerCm of [80, 160, 320])
    for (let i = FEWEST_POINTS; i < selection.x.length - FEWEST_POINTS; i += 3) {
      const local = localPolynomial(residual, selection.x[i]!, reachPerCm, 2)
      if (!local || local.coefficients[2]! >= 0) continue
      const times = -local.coefficients[2]! / Math.sqrt(local.covariance()[8]!)
      if (times > SIGNIFICANT && (best === null || times > best.times))
        best = { positionPerCm: selection.x[i]!, reachPerCm, times }
    }
  if (best === null) return null
  // a Gaussian's inflections are ±w/√(8 ln2) apart, a parabola fits best within them
  return component(best.positionPerCm, 2 * best.reachPerCm, best.reachPerCm * Math.sqrt(FOUR_LN2 / 2) * 1.5)
}
