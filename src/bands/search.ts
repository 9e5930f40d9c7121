/** From places where bands may be to solved recipes: starts, what comes out empty left out, the closest of each kind. */
import { BACKGROUNDS, makeRecipe, OTHER_BACKGROUNDS } from './candidates.ts'
import type { Tolerances } from './levenbergMarquardt.ts'
import type { Selection } from './points.ts'
import { apart, findSeeds, NARROWEST_PER_CM, type Seed, WIDEST_PER_CM } from './seeds.ts'
import { figuresOf } from './shapes.ts'
import { type Solution, solveRecipe } from './solveRecipe.ts'
import type { BackgroundTerm, BandHint, Recipe } from './types.ts'

export interface Found {
  readonly recipe: Recipe
  readonly solutions: readonly Solution[]
  readonly chi2: number
}

export type Place = Pick<Seed, 'positionPerCm' | 'widthPerCm'>

/** Where a flank starts; null: none. */
export type Tail = Place | null

export type Attempt = (places: readonly Place[], tail: Tail, background: readonly BackgroundTerm[]) => Found | null

/**
 * Solves recipes on the points. A background term that comes out empty is left out, and the rest starts anew from where it came to rest;
 * null where the flank comes out empty: without one it is tried anyway.
 */
export const searching =
  (points: readonly Selection[], windowPerCm: readonly [number, number], tolerances: Tolerances): Attempt =>
  (places, tail, background) => {
    const again = searching(points, windowPerCm, tolerances)
    const recipe = makeRecipe(places, tail ?? false, background, windowPerCm, 'search')
    const solutions = points.map((selection) => solveRecipe(recipe, selection, tolerances))
    if (!solutions.every((solution) => solution !== null)) return null
    const trial = { recipe, solutions, chi2: solutions.reduce((sum, solution) => sum + solution.chi2, 0) }
    const isEmpty = (k: number) => solutions.every(({ at }) => at.coefficients[k] === 0)
    if (tail && isEmpty(places.length)) return null
    const used = background.filter((_, k) => !isEmpty(recipe.components.length + k))
    return used.length === background.length || used.length === 0 ? trial : again(bandPlaces(trial), tail, used)
  }

export const closer = (best: Found, other: Found): Found => (other.chi2 < best.chi2 ? other : best)

/** The closest of each number of bands. */
export const leaders = (found: readonly Found[]): readonly Found[] => {
  const best = new Map<number, Found>()
  for (const trial of found) {
    const count = bandCount(trial.recipe)
    const other = best.get(count)
    best.set(count, other ? closer(other, trial) : trial)
  }
  return [...best.values()]
}

export const isLeading = (places: readonly Seed[], seeds: readonly Seed[]): boolean =>
  places.every((place) => seeds.indexOf(place) < places.length)

/** All but the strongest twice as wide: where bands overlap, the inflections of the weaker lie too close together. */
export const broadened = (places: readonly Seed[]): readonly Place[] =>
  places.map((place, k) => (k === 0 ? place : { ...place, widthPerCm: Math.min(WIDEST_PER_CM, 2 * place.widthPerCm) }))

/**
 * These places on every background (and what `extra` adds to each), without a flank, then with one from each start. What reaches the noise
 * rests in no false minimum and gains nothing by a flank that could pay for it: no further flank is tried.
 */
export const everyBackground = (
  places: readonly Place[],
  attempt: Attempt,
  tails: readonly Tail[],
  extra: readonly BackgroundTerm[],
): readonly (Found | null)[] => {
  const found: (Found | null)[] = []
  const backgrounds = [...BACKGROUNDS, ...OTHER_BACKGROUNDS]
  for (const tail of tails) {
    if (found.some((trial) => trial && isAtNoise(trial))) break
    for (const background of backgrounds) found.push(attempt(places, tail, [...background, ...extra]))
  }
  return found
}

/** χ², under the weights it was solved with, within three standard deviations of the number of points. */
const isAtNoise = ({ solutions, chi2 }: Found): boolean => {
  const count = solutions.reduce((sum, { at }) => sum + at.residuals.length, 0)
  return chi2 < count + 3 * Math.sqrt(2 * count)
}

export const bandCount = ({ components }: Recipe): number => components.filter(({ kind }) => kind === 'band').length

const mean = (values: readonly number[]): number => values.reduce((sum, v) => sum + v, 0) / values.length

const placeOf = ({ recipe, solutions }: Pick<Found, 'recipe' | 'solutions'>, k: number): Place => {
  const { kind } = recipe.components[k]!
  const found = solutions.map(({ parameters }) => {
    const [first, second] = [parameters[2 * k]!, parameters[2 * k + 1]!]
    if (kind === 'band') return { positionPerCm: first, widthPerCm: second }
    return figuresOf(recipe.components[k]!, first, second, recipe.windowPerCm[1])
  })
  return {
    positionPerCm: mean(found.map(({ positionPerCm }) => positionPerCm)),
    widthPerCm: mean(found.map(({ widthPerCm }) => widthPerCm)),
  }
}

export const bandPlaces = (trial: Pick<Found, 'recipe' | 'solutions'>): readonly Place[] =>
  trial.recipe.components.flatMap(({ kind }, k) => (kind === 'band' ? [placeOf(trial, k)] : []))

/** Hinted places first, then what the curves show, strongest first. */
export const placesOf = (points: readonly Selection[], hints: readonly BandHint[]): readonly Seed[] => {
  const seen = apart(points.flatMap((selection) => findSeeds(selection)).sort((a, b) => b.height - a.height))
  const hinted = hints.map(({ positionPerCm, withinPerCm }) => {
    const near = seen.filter(
      (seed) => Math.abs(seed.positionPerCm - positionPerCm) <= Math.max(withinPerCm, NARROWEST_PER_CM),
    )
    return near[0] ?? { positionPerCm, widthPerCm: 3500, height: 0 }
  })
  return apart([...hinted, ...seen])
}

/** Where the residuals, smoothed over less than a band, rise above the curve; highest first. */
export const missingBands = (trial: Found, points: readonly Selection[]): readonly Place[] => {
  const residual = points.map((selection, s) => ({
    ...selection,
    y: trial.solutions[s]!.at.residuals.map((r, i) => r / selection.weight[i]!),
  }))
  const places = bandPlaces(trial)
  const isFree = (seed: Seed) =>
    places.every(({ positionPerCm }) => Math.abs(positionPerCm - seed.positionPerCm) > NARROWEST_PER_CM / 2)
  return apart(residual.flatMap((selection) => findSeeds(selection)).sort((a, b) => b.height - a.height)).filter(isFree)
}

/** Where its flank came to rest; null where it has none. */
export const tailOf = (trial: Pick<Found, 'recipe' | 'solutions'>): Tail => {
  const flank = trial.recipe.components.findIndex(({ kind }) => kind === 'flank')
  return flank < 0 ? null : placeOf(trial, flank)
}

/** The recipe with its places as found. */
export const started = (trial: Found, bounds: 'search' | 'locked' = 'search'): Recipe => {
  const recipe = makeRecipe(
    bandPlaces(trial),
    tailOf(trial) ?? false,
    trial.recipe.background,
    trial.recipe.windowPerCm,
    bounds,
  )
  const components = recipe.components.map((component, k) => ({
    ...component,
    shape: trial.recipe.components[k]!.shape,
  }))
  return { ...recipe, name: trial.recipe.name, components }
}
