/**
 * The recipe of a sample, from its reference spectra together.
 *
 * Candidates: choices of the places where bands may be, the strongest always among them, each with the backgrounds and with or without a
 * charge-transfer flank. A band that only the residuals ask for may enter where the recipe then reaches the noise; else it is
 * one more admissible way to describe the spectra, and tells how far the positions depend on it. Score, summed over the spectra (Schwarz 1978):
 *   BIC = n′ ln(χ²/n) + p ln n′,  n′ = n/τ
 * with τ the correlation time of the residuals of the best candidate. Real bands are no Gaussians: against raw noise one
 * more band always pays, because residuals of structure look like n independent witnesses. They are not, n′ counts them.
 * On noise alone τ = 1 and the score is the usual one. Points are joined to some 240, which loses nothing of a broad band.
 */
import type { Spectrum } from '../spectrum/types.ts'
import { BACKGROUNDS, makeRecipe, OTHER_BACKGROUNDS } from './candidates.ts'
import { findMisfit } from './misfit.ts'
import { disorder, joinNeighbours, reweigh, type Selection, selectPoints, usedWindow } from './points.ts'
import { apart, findSeeds, NARROWEST_PER_CM, type Seed, subsets, WIDEST_PER_CM } from './seeds.ts'
import { componentAt } from './shapes.ts'
import { ROUGH, type Solution, solveRecipe } from './solveRecipe.ts'
import type { BackgroundTerm, BandHint, ChooseRecipe, Recipe, RecipeChoice } from './types.ts'
import { correlationTime, type Uncertainty, uncertaintyOf } from './uncertainty.ts'

const JOINED = 240
const MOST_SEEDS = 5
/** A band below this share of the highest is structure, not a d–d band. */
const LOWEST = 0.03
/** Height and width of a band over the uncertainties of height and position, correlation counted: less, and it is a way to bend the curve. */
const DETERMINED = { chosen: 3, admissible: 2 } as const
/** So many places that the residuals ask for are tried. */
const MOST_SUGGESTED = 3
/** Recipes whose score is within this of the best describe the spectra acceptably. */
const ADMISSIBLE = 10
/** The same where residuals are structure, whose effective number of points is known to a factor of two only. */
const ADMISSIBLE_WITH_MISFIT = 20
const MOST_ADMISSIBLE = 6
const FEWEST_RIVALS = 2
const NARROWEST_WINDOW_PER_CM = 3000

interface Trial {
  readonly recipe: Recipe
  readonly solutions: readonly Solution[]
  readonly chi2: number
  /** Determined well enough to be chosen, not only to be admissible. */
  readonly firm: boolean
}

interface Scored extends Trial {
  readonly score: number
}

const none = (spectra: readonly Spectrum[], why: string): RecipeChoice => ({
  kind: 'none',
  why,
  flags: [...new Set(spectra.flatMap((spectrum) => spectrum.flags))],
})

/** Deterministic: the same spectra in the same order give the same recipe. */
export const chooseRecipe: ChooseRecipe = (spectra, options) => {
  if (spectra.length === 0) return none(spectra, 'No spectrum was given.')
  for (const spectrum of spectra) {
    const fault = disorder(spectrum)
    if (fault !== null) return none(spectra, `A spectrum can't be fitted: ${fault}.`)
  }
  const windows = spectra.map(usedWindow)
  if (windows.some((window) => window === null)) return none(spectra, 'A spectrum has no point that can be used.')
  const windowPerCm: readonly [number, number] = [
    Math.max(...windows.map((window) => window![0])),
    Math.min(...windows.map((window) => window![1])),
  ]
  if (windowPerCm[1] - windowPerCm[0] < NARROWEST_WINDOW_PER_CM)
    return none(spectra, `The spectra share less than ${NARROWEST_WINDOW_PER_CM} cm⁻¹, less than a d–d band takes.`)
  const full = spectra.map((spectrum) => selectPoints(spectrum, windowPerCm, 0))
  if (full.some(({ x }) => x.length < 20)) return none(spectra, 'A spectrum has fewer than 20 points that can be used.')
  if (full.some(({ spread }) => !(spread > 0))) return none(spectra, 'A spectrum is a flat line.')
  return choose(spectra, full, windowPerCm, options.hints ?? [], options.bands)
}

const choose = (
  spectra: readonly Spectrum[],
  full: readonly Selection[],
  windowPerCm: readonly [number, number],
  hints: readonly BandHint[],
  bands: number | undefined,
): RecipeChoice => {
  const joined = full.map((points) => joinNeighbours(points, 0, JOINED))
  const seeds = placesOf(joined, hints)
  const richest = seeds.slice(0, bands ?? MOST_SEEDS)
  // a rich recipe may come to rest beside its best: the smallest of a few tells how far the spectra are from any
  const misfit = Math.min(
    ...BACKGROUNDS.flatMap((background) =>
      [false, true].map((flank) => findMisfit(makeRecipe(richest, flank, background, windowPerCm, 'search'), joined)),
    ),
  )
  const points = joined.map((selection) => reweigh(selection, misfit))
  const attempt: Attempt = (places, flank, background) => {
    const recipe = makeRecipe(places, flank, background, windowPerCm, 'search')
    const solutions = solveAll(recipe, points)
    if (!solutions) return null
    // a flank that comes out empty leaves the bands in better places than they started from
    if (flank && solutions.every(({ at }) => at.coefficients[places.length] === 0))
      return attempt(bandPlaces({ recipe, solutions }), false, background)
    return judged(recipe, solutions)
  }
  const empty = BACKGROUNDS.flatMap((background) => [false, true].map((flank) => attempt([], flank, background)))
  const seeded = subsets(seeds.slice(0, MOST_SEEDS), hints.length, bands).flatMap((places) =>
    everyBackground(places, attempt),
  )
  const seen = [...empty, ...seeded].filter((trial) => trial !== null)
  const suggested = suggestions(seen, points, bands, attempt)
  const varied = variants([...seen, ...suggested], points, attempt)
  const scored = score([...seen, ...suggested, ...varied], points)
  const mayBeChosen = (trial: Scored) =>
    bands === undefined
      ? trial.firm && (isSeen(trial, seeds) || findMisfit(trial.recipe, joined) === 0)
      : bandCount(trial.recipe) === bands
  const best = scored.toSorted((a, b) => a.score - b.score).find(mayBeChosen)
  if (!best)
    return none(
      spectra,
      `No fit with ${bands ?? 'any number of'} bands is sensible: a band comes out without height, undetermined or unlike a d–d band.`,
    )
  if (bandCount(best.recipe) === 0)
    return { kind: 'none', why: 'No band stands above noise and background.', flags: ['no-band'] }
  const others = scored
    .filter(
      (other) => other !== best && bandCount(other.recipe) > 0 && bandCount(other.recipe) >= bandCount(best.recipe),
    )
    .sort((a, b) => a.score - b.score)
    .filter((other, i, sorted) => !sorted.slice(0, i).some((better) => isSame(other, better)))
  const near = others.filter((other) => other.score < best.score + (misfit > 0 ? ADMISSIBLE_WITH_MISFIT : ADMISSIBLE))
  // Where the recipe misses the noise, its positions depend on it, however far behind the next one is.
  const close = near.length === 0 && misfit > 0 ? others.slice(0, FEWEST_RIVALS) : near.slice(0, MOST_ADMISSIBLE)
  const recipe = settle(best, full)
  return { kind: 'chosen', recipe, admissible: [recipe, ...close.map((other) => settle(other, joined))] }
}

/** Other starts that came to the same end. */
const isSame = (one: Trial, other: Trial): boolean =>
  one.recipe.name === other.recipe.name && Math.abs(one.chi2 - other.chi2) < 1e-3 * other.chi2

type Place = Pick<Seed, 'positionPerCm' | 'widthPerCm'>
type Attempt = (places: readonly Place[], flank: boolean, background: readonly BackgroundTerm[]) => Trial | null

/** Recipes with a band more than the best so far, where its residuals ask for one; again until there are `bands`. */
const suggestions = (
  seen: readonly Trial[],
  points: readonly Selection[],
  bands: number | undefined,
  attempt: Attempt,
): readonly Trial[] => {
  let found: readonly Trial[] = []
  for (let round = 0; round < (bands ?? 1); round++) {
    const best = bestOf(score([...seen, ...found], points))
    if (!best || bandCount(best.recipe) === 0 || bandCount(best.recipe) > (bands ?? Infinity)) break
    const tried = missingBands(best, points)
      .slice(0, MOST_SUGGESTED)
      .flatMap((place) => everyBackground([...bandPlaces(best), place], attempt))
    found = [...found, ...tried.filter((trial) => trial !== null)]
  }
  return found
}

const bandCount = ({ components }: Recipe): number => components.filter(({ kind }) => kind === 'band').length

/** Share of its width by which a band's place in the second derivative may be off where others lie on it. */
const SHOULDER = 0.3

/** Every band has a place of its own in the curve's second derivative. */
const isSeen = (trial: Trial, seeds: readonly Seed[]): boolean => {
  let left = seeds
  return bandPlaces(trial).every(({ positionPerCm, widthPerCm }) => {
    const distance = (seed: Seed) => Math.abs(seed.positionPerCm - positionPerCm)
    const own = left.toSorted((a, b) => distance(a) - distance(b))[0]
    left = left.filter((seed) => seed !== own)
    return own !== undefined && distance(own) < Math.max(NARROWEST_PER_CM, SHOULDER * widthPerCm)
  })
}

/** The best band positions so far under the other backgrounds. */
const variants = (trials: readonly Trial[], points: readonly Selection[], attempt: Attempt): readonly Trial[] => {
  const best = bestOf(
    score(
      trials.filter(({ firm }) => firm),
      points,
    ),
  )
  const tried = best ? everyBackground(bandPlaces(best), attempt, OTHER_BACKGROUNDS) : []
  return tried.filter((trial) => trial !== null)
}

/** Hinted places first, then what the curves show, strongest first. */
const placesOf = (points: readonly Selection[], hints: readonly BandHint[]): readonly Seed[] => {
  const seen = apart(points.flatMap((selection) => findSeeds(selection)).sort((a, b) => b.height - a.height))
  const hinted = hints.map(({ positionPerCm, withinPerCm }) => {
    const near = seen.filter(
      (seed) => Math.abs(seed.positionPerCm - positionPerCm) <= Math.max(withinPerCm, NARROWEST_PER_CM),
    )
    return near[0] ?? { positionPerCm, widthPerCm: 3500, height: 0 }
  })
  return apart([...hinted, ...seen])
}

const everyBackground = (
  places: readonly Place[],
  attempt: Attempt,
  backgrounds = BACKGROUNDS,
): readonly (Trial | null)[] =>
  backgrounds.flatMap((background) => [false, true].map((flank) => attempt(places, flank, background)))

const solveAll = (recipe: Recipe, points: readonly Selection[]): readonly Solution[] | null => {
  const solutions = points.map((selection) => solveRecipe(recipe, selection, ROUGH))
  return solutions.every((solution) => solution !== null) ? solutions : null
}

/** Null where, in most of the spectra, a component comes out without height, as structure, beyond the data or undetermined. */
const judged = (recipe: Recipe, solutions: readonly Solution[]): Trial | null => {
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
  const chi2 = solutions.reduce((sum, solution) => sum + solution.chi2, 0)
  return { recipe, solutions, chi2, firm: sensible(DETERMINED.chosen) }
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

const score = (trials: readonly Trial[], points: readonly Selection[]): readonly Scored[] => {
  const closest = trials.reduce<Trial | null>((best, trial) => (best && best.chi2 <= trial.chi2 ? best : trial), null)
  if (!closest) return []
  const effective = points.map(({ x }, s) => x.length / correlationTime(closest.solutions[s]!.at.residuals))
  return trials.map((trial) => {
    const parameters = 3 * trial.recipe.components.length + trial.recipe.background.length
    const total = trial.solutions.reduce(
      (sum, { chi2 }, s) =>
        sum + effective[s]! * Math.log(chi2 / points[s]!.x.length) + parameters * Math.log(effective[s]!),
      0,
    )
    return { ...trial, score: total }
  })
}

const bestOf = (scored: readonly Scored[]): Scored | null =>
  scored.reduce<Scored | null>((best, trial) => (best && best.score <= trial.score ? best : trial), null)

const mean = (values: readonly number[]): number => values.reduce((sum, v) => sum + v, 0) / values.length

const placeOf = ({ recipe, solutions }: Pick<Trial, 'recipe' | 'solutions'>, k: number): Place => {
  const shapes = solutions.map(({ parameters }) =>
    componentAt(recipe.components[k]!.kind, parameters[2 * k]!, parameters[2 * k + 1]!, recipe.windowPerCm[1]),
  )
  return {
    positionPerCm: mean(shapes.map((shape) => shape.positionPerCm)),
    widthPerCm: mean(shapes.map((shape) => shape.widthPerCm)),
  }
}

const bandPlaces = (trial: Pick<Trial, 'recipe' | 'solutions'>): readonly Place[] =>
  trial.recipe.components.flatMap(({ kind }, k) => (kind === 'band' ? [placeOf(trial, k)] : []))

/** Where the residuals, smoothed over less than a band, rise above the curve; highest first. */
const missingBands = (trial: Trial, points: readonly Selection[]): readonly Place[] => {
  const residual = points.map((selection, s) => ({
    ...selection,
    y: trial.solutions[s]!.at.residuals.map((r, i) => r / selection.weight[i]!),
  }))
  const places = bandPlaces(trial)
  const isFree = (seed: Seed) =>
    places.every(({ positionPerCm }) => Math.abs(positionPerCm - seed.positionPerCm) > NARROWEST_PER_CM / 2)
  return apart(residual.flatMap((selection) => findSeeds(selection)).sort((a, b) => b.height - a.height)).filter(isFree)
}

/** The recipe with its places as found, and the misfit it has. */
const settle = (trial: Trial, points: readonly Selection[]): Recipe => {
  const flank = trial.recipe.components.findIndex(({ kind }) => kind === 'flank')
  const settled = makeRecipe(
    bandPlaces(trial),
    flank < 0 ? false : placeOf(trial, flank),
    trial.recipe.background,
    trial.recipe.windowPerCm,
    'locked',
  )
  const misfit = findMisfit(settled, points)
  return misfit > 0 ? { ...settled, misfit } : settled
}
