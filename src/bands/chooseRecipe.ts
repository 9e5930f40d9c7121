/**
 * The recipe of a sample, from its reference spectra together.
 *
 * A first look takes choices of the places where bands may be, the strongest always among them, some with wider starts, with and without a
 * charge-transfer flank. The closest of each number of bands starts anew from where it came to rest, under every background and
 * flank, since one start alone often rests in a false minimum. A band that only the residuals ask for may enter where the recipe then
 * reaches the noise; else it is one more way to describe the spectra, and tells how far the positions depend on it, as
 * the rivals of rivals.ts do. Score, summed over the spectra (Schwarz 1978):
 *   BIC = n′ ln(χ²/n) + p ln n′,  n′ = n/τ
 * with τ the correlation time of the residuals of the best candidate. Real bands are no Gaussians: against raw noise one
 * more band always pays, because residuals of structure look like n independent witnesses. They are not, n′ counts them.
 * On noise alone τ = 1 and the score is the usual one, but for terms of the background, which have Akaike's price (judge.ts). Points are joined to some 240, which loses nothing of a broad band.
 */
import type { Spectrum } from '../spectrum/types.ts'
import { BACKGROUNDS, flankAtEdge, flankStart, RICH_BACKGROUND } from './candidates.ts'
import { showsBand } from './fitBands.ts'
import { bestOf, isSeen, judged, type Scored, score } from './judge.ts'
import { placeOfStep } from './lampStep.ts'
import { findMisfit } from './misfit.ts'
import { farthest } from './modelSpread.ts'
import { besideNarrow, withComponent, withNarrow } from './narrow.ts'
import {
  disorder,
  joinNeighbours,
  reweigh,
  type Selection,
  selectPoints,
  usedWindow,
  withoutStretch,
} from './points.ts'
import { rivalsOf } from './rivals.ts'
import {
  bandCount,
  bandPlaces,
  broadened,
  closer,
  everyBackground,
  type Found,
  isLeading,
  leaders,
  missingBands,
  type Place,
  placesOf,
  searching,
  started,
  type Tail,
} from './search.ts'
import { subsets } from './seeds.ts'
import { shaped } from './shaping.ts'
import { FIRST_LOOK, ROUGH } from './solveRecipe.ts'
import type { BackgroundTerm, BandHint, ChooseRecipe, Recipe, RecipeChoice } from './types.ts'

const JOINED = 240
/** For the first look, which takes recipes to be off by more than the curve bends between so many points. */
const JOINED_FIRST = 64
const MOST_SEEDS = 5
/** So many places that the residuals ask for are tried. */
const MOST_SUGGESTED = 3
/** Recipes whose score is within this of the best describe the spectra acceptably. */
const ADMISSIBLE = 10
/** The same where residuals are structure, whose effective number of points is known to a factor of two only. */
const ADMISSIBLE_WITH_MISFIT = 20
const MOST_ADMISSIBLE = 6
const FEWEST_RIVALS = 2
/** Share of the spread that the first look takes recipes to be off: solutions are found more surely than among weights of noise alone. */
const FIRST_MISFIT = 0.01
/** χ² over that of a sensible recipe from which a number of bands is given up after the first look. */
const HOPELESS = 100
const NARROWEST_WINDOW_PER_CM = 3000

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
  const hints = options.hints ?? []
  const narrow = hints.filter((hint) => hint.narrow)
  const broad = full.map((points) => besideNarrow(points, narrow))
  if (broad.some(({ x, spread }) => x.length < 20 || !(spread > 0)))
    return none(spectra, 'Beside the narrow features that the species names too few points are left for a broad band.')
  const flagged = 2 * spectra.filter(({ flags }) => flags.includes('lamp-step')).length > spectra.length
  const search = (points: readonly Selection[], extra: readonly BackgroundTerm[]) =>
    choose(
      spectra,
      points,
      windowPerCm,
      hints.filter((hint) => !hint.narrow),
      options.bands,
      extra,
    )
  const plain = search(broad, [])
  const choice = plain.kind === 'none' ? plain : withStep(plain, broad, flagged, search)
  return choice.kind === 'chosen' ? finished(choice, full, hints, narrow) : choice
}

/** Points joined across a step tell neither side: so much is left out about it, cm⁻¹. */
const BESIDE_STEP_PER_CM = 100

/** A step serves where it takes this share of the misfit away at least; where one is seen in the curve anyway, any share. */
const SERVES = 0.5

/** Another search with a step where the lamp changes, if the spectra show one that the recipe lacks, and it serves. */
const withStep = (
  plain: Extract<RecipeChoice, { kind: 'chosen' }>,
  points: readonly Selection[],
  flagged: boolean,
  search: (points: readonly Selection[], extra: readonly BackgroundTerm[]) => RecipeChoice,
): RecipeChoice => {
  const atPerCm = placeOfStep(plain.recipe, points, flagged)
  if (atPerCm === null) return plain
  const beside = points.map((selection) =>
    withoutStretch(selection, [atPerCm - BESIDE_STEP_PER_CM, atPerCm + BESIDE_STEP_PER_CM]),
  )
  const stepped = search(beside, [{ kind: 'step', atPerCm }])
  if (stepped.kind === 'none') return plain
  const [before, after] = [plain.recipe.misfit ?? 0, stepped.recipe.misfit ?? 0]
  return after === 0 || after < (flagged ? 1 : SERVES) * before ? stepped : plain
}

/** What the search for broad bands does not tell: the shapes that the species asks for, and narrow features. */
const finished = (
  { recipe, admissible }: Extract<RecipeChoice, { kind: 'chosen' }>,
  points: readonly Selection[],
  hints: readonly BandHint[],
  narrow: readonly BandHint[],
): Extract<RecipeChoice, { kind: 'chosen' }> => {
  const joined = points.map((selection) => joinNeighbours(selection, 0, JOINED))
  const broad = shaped(recipe, hints, recipe.misfit === undefined ? joined : points)
  const whole = withNarrow(broad, narrow, points)
  if (whole === recipe) return { kind: 'chosen', recipe, admissible }
  const features = whole.components.filter((component) => component.narrow)
  const completed = (one: Recipe) => weighted(features.reduce(withComponent, one), points)
  const others = admissible.filter((other) => other !== recipe)
  const own = weighted(whole, points)
  return { kind: 'chosen', recipe: own, admissible: [own, ...others.map(completed)] }
}

const choose = (
  spectra: readonly Spectrum[],
  full: readonly Selection[],
  windowPerCm: readonly [number, number],
  hints: readonly BandHint[],
  bands: number | undefined,
  extra: readonly BackgroundTerm[],
): RecipeChoice => {
  const joined = full.map((points) => joinNeighbours(points, 0, JOINED))
  const seeds = placesOf(joined, hints)
  const tails: readonly Tail[] = [null, flankStart(joined), flankAtEdge(windowPerCm)]
  const few = full.map((points) => joinNeighbours(points, FIRST_MISFIT, JOINED_FIRST))
  const first = searching(few, windowPerCm, FIRST_LOOK)
  const sets = subsets(seeds.slice(0, MOST_SEEDS), hints.length, bands)
  const starts = sets.flatMap((places) =>
    places.length > 1 && isLeading(places, seeds) ? [places, broadened(places)] : [places],
  )
  const look = (tail: Tail) => [
    ...BACKGROUNDS.map((background) => first([], tail, [...background, ...extra])),
    ...starts.map((places) => first(places, tail, [...RICH_BACKGROUND, ...extra])),
  ]
  const bare = look(null).filter((trial) => trial !== null)
  // where noise is reached without a flank one would be looked for in vain
  const found = missed(bare, joined) === 0 ? bare : [...bare, ...look(tails[1]!).filter((trial) => trial !== null)]
  if (found.length === 0) return none(spectra, 'No recipe can be evaluated on these spectra.')
  const misfit = found === bare ? 0 : missed(found, joined)
  const points = joined.map((selection) => reweigh(selection, misfit))
  const attempt = searching(points, windowPerCm, ROUGH)
  const running = inTheRunning(leaders(found), few, bands)
  const refined = running.flatMap((trial) => everyBackground(bandPlaces(trial), attempt, tails, extra))
  const seen = refined.filter((trial) => trial !== null)
  const suggested = suggestions(seen, points, misfit, bands, (places) => everyBackground(places, attempt, tails, extra))
  const scored = score(
    [...seen, ...suggested].flatMap((trial) => judged(trial, points, misfit) ?? []),
    points,
    misfit,
  )
  const settled = new Map<Scored, Recipe>()
  const recipeOf = (trial: Scored): Recipe => {
    const recipe = settled.get(trial) ?? settle(trial, joined)
    settled.set(trial, recipe)
    return recipe
  }
  // where structure is missed two bands in place of one may each be undetermined on all the points
  const isFitted = (trial: Scored) =>
    misfit === 0 || bandCount(trial.recipe) === 0 || spectra.some((spectrum) => showsBand(spectrum, recipeOf(trial)))
  const mayBeChosen = (trial: Scored) =>
    bands === undefined
      ? trial.stands &&
        (isSeen(trial, seeds) || (trial.firm && findMisfit(trial.recipe, joined) === 0)) &&
        isFitted(trial)
      : bandCount(trial.recipe) === bands
  const ranked = scored.toSorted((a, b) => a.score - b.score)
  const favoured = ranked.find(mayBeChosen)
  const isEmpty = favoured === undefined || bandCount(favoured.recipe) === 0
  const without = favoured?.score ?? Infinity
  // bands that no second derivative shows, but that the curve can't do without
  const indispensable =
    isEmpty && bands === undefined
      ? ranked
          .filter(({ recipe, stands, score }) => bandCount(recipe) > 0 && stands && score < without - ADMISSIBLE)
          .find(isFitted)
      : undefined
  const best = indispensable ?? favoured
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
  const recipe = recipeOf(best)
  const richer = others.find((other) => bandCount(other.recipe) > bandCount(best.recipe))
  const isMissed = recipe.misfit !== undefined
  const shaped = rivalsOf(best, points, isMissed)
  const rivals = farthest(best, [...(isMissed && richer ? [richer] : []), ...shaped, ...close])
  return { kind: 'chosen', recipe, admissible: [recipe, ...rivals.map((other) => settle(other, joined))] }
}

/** The misfit of the closest of all, sensible or not: how far the spectra are from any sum of bands. */
const missed = (found: readonly Found[], points: readonly Selection[]): number =>
  found.length === 0 ? Infinity : findMisfit(started(found.reduce(closer)), points)

/** Numbers of bands whose closest recipe is not off by ten times as much as another that is sensible. */
const inTheRunning = (
  candidates: readonly Found[],
  points: readonly Selection[],
  bands: number | undefined,
): readonly Found[] => {
  const sensible = candidates.filter((trial) => judged(trial, points, FIRST_MISFIT) !== null)
  const limit = HOPELESS * Math.min(...sensible.map(({ chi2 }) => chi2))
  return candidates.filter(({ recipe, chi2 }) => chi2 <= limit || bandCount(recipe) === bands)
}

/** Other starts that came to the same end. */
const isSame = (one: Found, other: Found): boolean =>
  one.recipe.name === other.recipe.name && Math.abs(one.chi2 - other.chi2) < 1e-3 * other.chi2

/** Recipes with a band more than the best so far, where its residuals ask for one; again until there are `bands`. */
const suggestions = (
  seen: readonly Found[],
  points: readonly Selection[],
  misfit: number,
  bands: number | undefined,
  attempt: (places: readonly Place[]) => readonly (Found | null)[],
): readonly Found[] => {
  let found: readonly Found[] = []
  // where noise is reached nothing is missing
  const rounds = bands ?? (misfit > 0 ? 1 : 0)
  for (let round = 0; round < rounds; round++) {
    const best = bestOf(score([...seen, ...found], points, misfit))
    if (!best || bandCount(best.recipe) === 0 || bandCount(best.recipe) > (bands ?? Infinity)) break
    const tried = missingBands(best, points)
      .slice(0, MOST_SUGGESTED)
      .flatMap((place) => attempt([...bandPlaces(best), place]))
    found = [...found, ...tried.filter((trial) => trial !== null)]
  }
  return found
}

/** The recipe with its places as found, and the misfit it has. */
const settle = (trial: Found, points: readonly Selection[]): Recipe => weighted(started(trial, 'locked'), points)

const weighted = ({ misfit: _, ...recipe }: Recipe, points: readonly Selection[]): Recipe => {
  const misfit = findMisfit(recipe, points)
  return misfit > 0 ? { ...recipe, misfit } : recipe
}
