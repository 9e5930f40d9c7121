/** How far positions depend on the recipe: which rivals tell it, and how much it is on one spectrum. */
import { joinNeighbours, type Selection } from './points.ts'
import { bandPlaces, type Found, type Place } from './search.ts'
import { ROUGH, solveRecipe } from './solveRecipe.ts'
import type { Recipe } from './types.ts'

/** Points to which a spectrum is joined for the fits of other recipes. */
const JOINED = 240
/** As many at least over the narrowest width. */
const OVER_A_WIDTH = 5
/** Distance within which a rival's band is the same band, in widths. */
const SAME_BAND = 0.5

/** In what a rival differs; what these do to a position has separate causes. */
const DIFFERENCES = ['bands', 'shapes', 'background'] as const

const differenceOf = (recipe: Recipe, rival: Recipe): (typeof DIFFERENCES)[number] => {
  const bands = ({ components }: Recipe) => components.filter(({ kind }) => kind === 'band')
  if (bands(recipe).length !== bands(rival).length) return 'bands'
  const shapes = (one: Recipe) => bands(one).map(({ shape }) => JSON.stringify(shape))
  return shapes(recipe).join() === shapes(rival).join() ? 'background' : 'shapes'
}

/** How far a band goes under a rival: to the nearest of its bands; 0 where none is near. cm⁻¹ */
const movedBy = (place: Place, rival: readonly Pick<Place, 'positionPerCm'>[]): number => {
  const moves = rival.map(({ positionPerCm }) => Math.abs(positionPerCm - place.positionPerCm))
  const least = Math.min(...moves)
  return least < SAME_BAND * place.widthPerCm ? least : 0
}

/** Of many rivals those that move some band farthest, in each kind of difference: they tell the spread, the others only take time. */
export const farthest = (best: Found, rivals: readonly Found[]): readonly Found[] => {
  const kept = new Set<Found>()
  for (const place of bandPlaces(best))
    for (const difference of DIFFERENCES) {
      const alike = rivals.filter(({ recipe }) => differenceOf(best.recipe, recipe) === difference)
      const moves = alike.map((rival) => movedBy(place, bandPlaces(rival)))
      const most = Math.max(0, ...moves)
      if (most > 0) kept.add(alike[moves.indexOf(most)]!)
    }
  return [...kept]
}

/**
 * Per component, how far its centre goes under the other admissible recipes: the greatest distance for each kind of difference, added in
 * quadrature. Where the recipe reaches the noise the truth is taken to lie among them, and the distance counts by 1/√3, the standard
 * uncertainty of a rectangular distribution (GUM 4.3.7), 0 without a rival. Where it does not, none of them is true, nothing bounds it,
 * and the distance counts in full; null without a rival, and for a flank.
 */
export const modelSpreads = (
  recipe: Recipe,
  admissible: readonly Recipe[],
  points: Selection,
): readonly (number | null)[] => {
  const isMissed = (recipe.misfit ?? 0) > 0
  const others = admissible.filter((other) => !isSame(other, recipe))
  // A recipe that reaches the noise and has no rival has no spread; one that does not has an unknown one.
  const alone = admissible.length > 0 && !isMissed ? 0 : null
  const own = placesUnder(recipe, points)
  const rivals = others.map((other) => ({
    difference: differenceOf(recipe, other),
    places: placesUnder(other, points),
  }))
  return recipe.components.map(({ kind }, k) => {
    const place = own[k]
    if (kind !== 'band' || !place) return null
    if (others.length === 0) return alone
    const spreads = DIFFERENCES.map((difference) =>
      Math.max(
        0,
        ...rivals
          .filter((one) => one.difference === difference)
          .map(({ places }) =>
            movedBy(
              place,
              places.filter((p) => p !== null),
            ),
          ),
      ),
    )
    return Math.hypot(...spreads) / (isMissed ? 1 : Math.sqrt(3))
  })
}

const isSame = (one: Recipe, other: Recipe): boolean =>
  one === other || (one.name === other.name && JSON.stringify(one.components) === JSON.stringify(other.components))

/** Where the bands of a recipe come to rest; null for a flank and a band without height. */
const placesUnder = (recipe: Recipe, points: Selection): readonly (Place | null)[] => {
  const [from, to] = recipe.windowPerCm
  const narrowest = Math.min(...recipe.components.map(({ widthPerCm }) => widthPerCm))
  const most = Math.max(JOINED, (OVER_A_WIDTH * (to - from)) / narrowest)
  const solution = solveRecipe(recipe, joinNeighbours(points, recipe.misfit ?? 0, most), ROUGH)
  return recipe.components.map(({ kind }, k) =>
    solution && kind === 'band' && solution.at.coefficients[k]! > 0
      ? { positionPerCm: solution.parameters[2 * k]!, widthPerCm: solution.parameters[2 * k + 1]! }
      : null,
  )
}
