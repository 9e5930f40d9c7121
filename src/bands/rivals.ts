/**
 * Recipes that describe the spectra otherwise than the chosen one: what no criterion may choose, but what tells how far the
 * positions depend on the shape of bands and background.
 */
import { flankStart, makeRecipe, recipeName } from './candidates.ts'
import type { Selection } from './points.ts'
import { bandPlaces, closer, type Found, missingBands, searching, started, tailOf } from './search.ts'
import { ROUGH, solveRecipe } from './solveRecipe.ts'
import type { BackgroundTerm, Recipe } from './types.ts'

/** Asymmetries tried: half maxima whose distances from the centre are as e^2b : 1. */
const SKEWS = [-0.25, -0.12, 0.12, 0.25] as const
const TILTED: readonly BackgroundTerm[] = [{ kind: 'constant' }, { kind: 'scatter', exponent: 1 }]

/** Closer to the spectra than the chosen one, each with a band that is skewed where it was not. */
const skewedRivals = (best: Found, points: readonly Selection[]): readonly Found[] => {
  const rivals: Found[] = []
  let current = best
  best.recipe.components.forEach(({ kind }, k) => {
    if (kind !== 'band') return
    const from = started(current)
    const tried = SKEWS.flatMap((skew) => solved(withSkew(from, k, skew), points) ?? [])
    const closest = tried.reduce(closer, current)
    if (closest === current) return
    current = closest
    rivals.push(closest)
  })
  return rivals
}

const withSkew = (recipe: Recipe, k: number, skew: number): Recipe => {
  const components = recipe.components.map((component, i) =>
    i === k ? { ...component, shape: { kind: 'log-normal' as const, skew } } : component,
  )
  return { ...recipe, components, name: recipeName(components, recipe.background) }
}

const solved = (recipe: Recipe, points: readonly Selection[]): Found | null => {
  const solutions = points.map((selection) => solveRecipe(recipe, selection, ROUGH))
  return solutions.every((solution) => solution !== null)
    ? { recipe, solutions, chi2: solutions.reduce((sum, { chi2 }) => sum + chi2, 0) }
    : null
}

/** On a baseline that is tilted, where that describes the spectra as well: Δχ² below this for χ² of one a point. */
const AS_WELL = 10

const tiltedRivals = (best: Found, points: readonly Selection[]): readonly Found[] => {
  const count = points.reduce((sum, { x }) => sum + x.length, 0)
  const { windowPerCm, background } = best.recipe
  const steps = background.filter(({ kind }) => kind === 'step')
  return [false, flankStart(points)].flatMap((tail) => {
    const recipe = makeRecipe(bandPlaces(best), tail, [...TILTED, ...steps], windowPerCm, 'search')
    const found = solved(recipe, points)
    return found && found.chi2 < best.chi2 * (1 + AS_WELL / count) ? [found] : []
  })
}

/** So many places that the residuals ask for are tried. */
const MOST_RICHER = 4

/**
 * With a band more where its residuals ask for one, and with one more still, however little that gains: positions move most
 * with the number of bands.
 */
const richerRivals = (best: Found, points: readonly Selection[]): readonly Found[] => {
  const attempt = searching(points, best.recipe.windowPerCm, ROUGH)
  const richer = (found: Found, most: number): readonly Found[] =>
    missingBands(found, points)
      .slice(0, most)
      .map((place) => attempt([...bandPlaces(found), place], tailOf(found), found.recipe.background))
      .filter((trial) => trial !== null)
      .filter(({ chi2 }) => chi2 < found.chi2)
  const once = richer(best, MOST_RICHER)
  return [...once, ...once.flatMap((found) => richer(found, 2))]
}

/** On a tilted baseline, and where the chosen recipe misses the noise with skewed bands and with one more. */
export const rivalsOf = (best: Found, points: readonly Selection[], isMissed: boolean): readonly Found[] => [
  ...(isMissed ? [...richerRivals(best, points), ...skewedRivals(best, points)] : []),
  ...tiltedRivals(best, points),
]
