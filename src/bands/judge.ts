/** Which solved recipes are sensible, which bands are there, and the score they are ranked by. */
import type { Selection } from './points.ts'
import { bandPlaces, type Found } from './search.ts'
import { NARROWEST_PER_CM, type Seed, WIDEST_PER_CM } from './seeds.ts'
import type { Solution } from './solveRecipe.ts'
import { standing } from './standing.ts'
import type { Recipe } from './types.ts'
import { correlationTime, repeatabilityOf, type Uncertainty, uncertaintyOf } from './uncertainty.ts'

/** A band below this share of the highest is structure, not a d–d band. */
const LOWEST = 0.03

/** Height and width of a band over the uncertainties of height and position, correlation counted: less, and it is a way to bend the curve. */
const DETERMINED = { chosen: 3, admissible: 2 } as const

export interface Trial extends Found {
  /** Determined well enough to be chosen, not only to be admissible. */
  readonly firm: boolean
  /** Higher than the noise, and than what structure could feign. */
  readonly stands: boolean
}

/** Null where, in most of the spectra, a component comes out without height, as structure, beyond the data or undetermined. */
export const judged = (found: Found, points: readonly Selection[], misfit: number): Trial | null => {
  const { recipe, solutions } = found
  const uncertainties = solutions.map((solution) => uncertaintyOf(recipe, solution))
  const sensible = (determined: number) =>
    recipe.components.every((component, k) => {
      const times = solutions.filter((solution, s) =>
        isSensible(recipe, solution, uncertainties[s]!, component.kind, k, determined),
      )
      return 2 * times.length >= solutions.length
    })
  const used = recipe.background.every((_, k) =>
    solutions.some(({ at }) => at.coefficients[recipe.components.length + k]! !== 0),
  )
  if (!used || !sensible(DETERMINED.admissible)) return null
  const present = solutions.map((solution, s) => {
    const weighted = { ...recipe, misfit }
    const own = uncertainties[s]!
    return standing(weighted, solution, points[s]!, repeatabilityOf(weighted, solution, points[s]!, 'stated', own), own)
  })
  const stands = recipe.components.every(
    ({ kind }, k) => kind === 'flank' || 2 * present.filter((there) => there[k]!).length >= solutions.length,
  )
  return { ...found, firm: sensible(DETERMINED.chosen), stands }
}

const isSensible = (
  recipe: Recipe,
  { at, parameters }: Solution,
  uncertainty: Uncertainty | null,
  kind: 'band' | 'flank',
  k: number,
  limit: number,
): boolean => {
  const height = at.coefficients[k]!
  if (kind === 'flank') return height > 0
  const heights = recipe.components.map((component, i) => (component.kind === 'band' ? at.coefficients[i]! : 0))
  const position = parameters[2 * k]!
  const width = parameters[2 * k + 1]!
  const [from, to] = recipe.windowPerCm
  const inside = position > from - width / 4 && position < to + width / 4
  const heightVariance = uncertainty?.ofCoefficient(k) ?? Infinity
  const positionVariance = uncertainty?.ofParameter(2 * k, 2 * k) ?? Infinity
  const determined = height > limit * Math.sqrt(heightVariance) && width > limit * Math.sqrt(positionVariance)
  const shaped = width > NARROWEST_PER_CM && width < WIDEST_PER_CM
  return inside && shaped && determined && height > LOWEST * Math.max(...heights)
}

/** Share of its width by which a band's place in the second derivative may be off where others lie on it. */
const SHOULDER = 0.3

/** Every band has a place of its own in the curve's second derivative. */
export const isSeen = (trial: Trial, seeds: readonly Seed[]): boolean => {
  let left = seeds
  return bandPlaces(trial).every(({ positionPerCm, widthPerCm }) => {
    const distance = (seed: Seed) => Math.abs(seed.positionPerCm - positionPerCm)
    const own = left.toSorted((a, b) => distance(a) - distance(b))[0]
    left = left.filter((seed) => seed !== own)
    return own !== undefined && distance(own) < Math.max(NARROWEST_PER_CM, SHOULDER * widthPerCm)
  })
}

/**
 * What a term of the background must gain (Akaike 1974), less than a parameter of a band (Schwarz 1978): a term left out that is there
 * moves the bands by more than their uncertainty, one kept that is not there only widens it. Where structure is missed the
 * uncertainty is not what counts, and every parameter has Schwarz's price.
 */
const PRICE_BEHIND = 2

export interface Scored extends Trial {
  readonly score: number
}

export const score = <T extends Found>(
  trials: readonly T[],
  points: readonly Selection[],
  misfit: number,
): readonly (T & { readonly score: number })[] => {
  const closest = trials.reduce<T | null>((best, trial) => (best && best.chi2 <= trial.chi2 ? best : trial), null)
  if (!closest) return []
  const effective = points.map(({ x }, s) => x.length / correlationTime(closest.solutions[s]!.at.residuals))
  return trials.map((trial) => {
    const { components, background } = trial.recipe
    const total = trial.solutions.reduce(
      (sum, { chi2 }, s) =>
        sum +
        effective[s]! * Math.log(chi2 / points[s]!.x.length) +
        3 * components.length * Math.log(effective[s]!) +
        background.length * (misfit > 0 ? Math.log(effective[s]!) : PRICE_BEHIND),
      0,
    )
    return { ...trial, score: total }
  })
}

export const bestOf = <T extends { readonly score: number }>(scored: readonly T[]): T | null =>
  scored.reduce<T | null>((best, trial) => (best && best.score <= trial.score ? best : trial), null)
