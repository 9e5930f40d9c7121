import { ENGINE } from '../analysis/types.ts'
import type { RecipeState } from '../store/recipes.ts'
import type { StoredSpectrum } from '../store/spectra.ts'
import type { Subject } from './context.ts'
import { keepAnalysis } from './keepAnalysis.ts'
import { occasionsOfRows } from './occasions.ts'
import type { Stations } from './pipeline.ts'
import type { FitResult } from './worker.ts'

/**
 * The recipe of a sample on an instrument: provisional from its first spectrum, chosen again on all spectra of its
 * reference when that is complete, and locked from then on. A sample that is compared with another one
 * (`reference: { sample: … }`) takes that one's recipe, since only spectra of one recipe are compared.
 */
export const recipeInForce = (
  { sample, instrument }: Subject,
  { store }: Pick<Stations, 'store'>,
): RecipeState | null => store.recipes.of(sample, instrument.name)

/** How many spectra at the most a recipe is chosen on. */
const MOST_SPECTRA = 40

/** Occasions after which the recipe of a sample is locked where the study names another kind of reference. */
const OCCASIONS_BY_DEFAULT = 5

/** Locks the sample's recipe when what it depends on is there. May be called at any time; does nothing twice. */
export const settleRecipe = async (subject: Subject, stations: Stations): Promise<void> => {
  if (recipeInForce(subject, stations)?.locked === true) return
  const other = referenceSample(subject)
  if (other === null) {
    if (ownOccasions(subject, stations).length >= occasionsNeeded(subject)) await lockOwn(subject, stations)
    return
  }
  // asked for by another sample, the reference sample's recipe is locked on what there is of it
  if (ownOccasions(other, stations).length === 0) return
  if (recipeInForce(other, stations)?.locked !== true) await lockOwn(other, stations)
  await adopt(subject, other, stations)
}

/** The sample that this one is compared with, as a subject of the same study; null where it is its own reference. */
export const referenceSample = (subject: Subject): Subject | null => {
  const { reference } = subject.study
  return reference.kind === 'sample' && reference.sample !== subject.sample
    ? { ...subject, sample: reference.sample }
    : null
}

export const occasionsNeeded = ({ study: { reference } }: Subject): number =>
  reference.kind === 'first' ? reference.occasions : reference.kind === 'values' ? 1 : OCCASIONS_BY_DEFAULT

/** The spectra a sample's recipe is chosen on: its frozen reference, else its first occasions so far. */
export const referenceSpectra = (subject: Subject, stations: Pick<Stations, 'store'>): readonly number[] => {
  const { sample, instrument } = subject
  const frozen = stations.store.recipes.frozenReference(sample, instrument.name)
  if (frozen !== null) return frozen.filter((id) => !stations.store.decisions.isExcluded(id))
  return ownOccasions(subject, stations)
    .slice(0, occasionsNeeded(subject))
    .flatMap(({ spectra }) => spectra)
}

const ownOccasions = (subject: Subject, { store }: Pick<Stations, 'store'>) => {
  const recipe = store.recipes.of(subject.sample, subject.instrument.name)
  if (recipe === null) return []
  const of = { sample: subject.sample, instrument: subject.instrument.name, recipe: recipe.sha256, engine: ENGINE }
  return occasionsOfRows(store.analyses.window(of, Number.MAX_SAFE_INTEGER, MOST_SPECTRA), subject, store)
}

/** Chooses anew on all spectra of the reference together, refits them, and locks. */
const lockOwn = async (subject: Subject, stations: Stations): Promise<void> => {
  const { store, pool, now, log } = stations
  const ids = ownOccasions(subject, stations).flatMap(({ spectra }) => spectra)
  const spectra = storedSpectra(ids, stations)
  const provisional = recipeInForce(subject, stations)
  const result = await pool.fit({ raws: spectra.map(({ raw }) => raw), context: subject.context, recipe: 'choose' })
  const chosen = 'kind' in result ? null : result.locked
  if ('kind' in result) log.warn({ sample: subject.sample, why: result.why }, 'the recipe could not be chosen anew')
  if (chosen === null && provisional === null) return
  store.atomically(() => {
    const why = `chosen on the ${ids.length} spectra of the reference`
    const sha256 = store.recipes.choose(subject.sample, subject.instrument.name, chosen ?? provisional!.recipe, {
      locked: true,
      spectra: ids,
      why,
      at: now(),
    })
    if (!('kind' in result) && sha256 !== provisional?.sha256) refitted(subject, spectra, result, sha256, stations)
  })
}

/** Takes over the recipe of the reference sample and refits what the sample has so far. */
const adopt = async (subject: Subject, other: Subject, stations: Stations): Promise<void> => {
  const { store, pool, now } = stations
  const theirs = recipeInForce(other, stations)
  if (theirs === null) return
  const spectra = storedSpectra(
    ownOccasions(subject, stations).flatMap((occasion) => occasion.spectra),
    stations,
  )
  const raws = spectra.map(({ raw }) => raw)
  const result = raws.length === 0 ? null : await pool.fit({ raws, context: subject.context, recipe: theirs.recipe })
  store.atomically(() => {
    const sha256 = store.recipes.choose(subject.sample, subject.instrument.name, theirs.recipe, {
      locked: true,
      spectra: [],
      why: `the recipe of its reference sample ${other.sample}`,
      at: now(),
    })
    if (result !== null && !('kind' in result)) refitted(subject, spectra, result, sha256, stations)
  })
}

const storedSpectra = (ids: readonly number[], { store }: Stations): readonly StoredSpectrum[] =>
  ids.flatMap((id) => store.spectra.get(id) ?? [])

const refitted = (
  subject: Subject,
  spectra: readonly StoredSpectrum[],
  { analyses }: FitResult,
  recipe: string,
  stations: Stations,
): void => {
  spectra.forEach(({ id, raw, flags }, i) => {
    const analysis = analyses[i]!
    const withFlags = { ...analysis, flags: [...new Set([...analysis.flags, ...flags])] }
    keepAnalysis(id, raw, subject, withFlags, recipe, stations)
  })
}
