import type { Analysis, LockedRecipe } from '../analysis/types.ts'
import type { StoredSpectrum } from '../store/spectra.ts'
import type { Subject } from './context.ts'
import { subjectOf } from './context.ts'
import { keepAnalysis } from './keepAnalysis.ts'
import type { Stations } from './pipeline.ts'
import { recipeInForce, referenceSample, referenceSpectra } from './recipe.ts'

/** The part of the daemon's stations that a reanalysis works with; it runs in a process of its own. */
export type ReanalysisStations = Pick<Stations, 'store' | 'pool' | 'now' | 'room' | 'log'>

export interface ReanalysisAsked {
  readonly sample: string
  readonly instrument: string
  /** `new`: chosen anew on the reference spectra; `keep`: the recipe in force, by the engine of today. */
  readonly recipe: 'new' | 'keep'
  /** Exactly this many d–d bands in a new recipe; null: the criterion decides. */
  readonly bands: number | null
  readonly by: string
  readonly why: string
}

export type Reanalysed =
  | {
      readonly kind: 'done'
      readonly spectra: number
      readonly recipe: string
      /** The recipe differs from the one in force before. */
      readonly isNew: boolean
    }
  | { readonly kind: 'refused'; readonly why: string; readonly remedy: string }

/** Spectra that a recipe is chosen on where no reference is known. */
const FIRST = 5
/** Spectra that one worker takes at a time. */
const AT_ONCE = 16

/**
 * Fits all stored spectra of a sample on an instrument again; the old analyses stay. Everything is computed first and committed
 * together with the recipe, so that windows and references never hold two recipes; spectra that arrived meanwhile are taken in. Raises no alarm.
 */
export const reanalyse = async (
  asked: ReanalysisAsked,
  stations: ReanalysisStations,
  progress: (done: number, total: number) => void,
): Promise<Reanalysed> => {
  const { store, now } = stations
  const subject = subjectAsked(asked, stations)
  if (subject === null) return refused(`no study claims ${asked.sample} on ${asked.instrument}`, 'name it in a study')
  const before = recipeInForce(subject, stations)
  if (before === null)
    return refused(`no spectrum of ${asked.sample} was fitted on ${asked.instrument} yet`, 'wait for the first')
  const recipe = await recipeAsked(asked, subject, before.recipe, stations)
  if ('kind' in recipe) return recipe
  const fitted = new Map<number, Analysis>()
  for (;;) {
    const all = store.spectra.idsOf(asked.sample, asked.instrument)
    const missing = all.filter((id) => !fitted.has(id))
    for (let from = 0; from < missing.length; from += AT_ONCE) {
      const failure = await fitSome(missing.slice(from, from + AT_ONCE), subject, recipe, fitted, stations)
      if (failure !== null) return failure
      progress(fitted.size, all.length)
    }
    const outcome = store.atomically((): Reanalysed | null => {
      // another one may have arrived while these were fitted
      if (store.spectra.idsOf(asked.sample, asked.instrument).some((id) => !fitted.has(id))) return null
      store.records.decide(now(), asked.by, 'reanalyse', `sample ${asked.sample} on ${asked.instrument}`, asked.why)
      const sha256 = store.recipes.choose(asked.sample, asked.instrument, recipe, {
        locked: before.locked,
        spectra: asked.recipe === 'new' ? referenceSpectra(subject, stations) : [],
        why: `reanalysed: ${asked.why}`,
        at: now(),
      })
      for (const [id, analysis] of fitted) keepAgain(id, analysis, subject, sha256, stations)
      return { kind: 'done', spectra: fitted.size, recipe: recipe.recipe.name, isNew: sha256 !== before.sha256 }
    })
    if (outcome !== null) return outcome
  }
}

const refused = (why: string, remedy: string): Extract<Reanalysed, { kind: 'refused' }> => ({
  kind: 'refused',
  why,
  remedy,
})

const subjectAsked = ({ sample, instrument, bands }: ReanalysisAsked, { room }: ReanalysisStations): Subject | null => {
  const { config, studyOf } = room()
  const found = config.instruments.find(({ name }) => name === instrument)
  const subject = found === undefined ? null : subjectOf(sample, found, studyOf, config)
  return subject && { ...subject, context: { ...subject.context, bands } }
}

const recipeAsked = async (
  { sample, instrument, recipe }: ReanalysisAsked,
  subject: Subject,
  before: LockedRecipe,
  stations: ReanalysisStations,
): Promise<LockedRecipe | Extract<Reanalysed, { kind: 'refused' }>> => {
  const { pool } = stations
  const other = referenceSample(subject)
  if (other !== null) {
    const theirs = recipeInForce(other, stations)
    return theirs === null
      ? refused(
          `${other.sample}, with which ${sample} is compared, has no recipe yet`,
          `reanalyse ${other.sample} first`,
        )
      : theirs.recipe
  }
  if (recipe === 'keep') return before
  const reference = referenceSpectra(subject, stations)
  // by an earlier engine there are no occasions of today's
  const ids = reference.length > 0 ? reference : stations.store.spectra.idsOf(sample, instrument).slice(0, FIRST)
  const raws = storedOf(ids, stations).map(({ raw }) => raw)
  if (raws.length === 0)
    return refused(`no spectrum of the reference of ${sample} on ${instrument} is left`, 'restore one')
  const result = await pool.fit({ raws, context: subject.context, recipe: 'choose' })
  if ('kind' in result) return refused(`no recipe could be chosen: ${result.why}`, 'keep the recipe with --keep-recipe')
  if (result.locked !== null) return result.locked
  const [first] = result.analyses
  const why = first?.fit.kind === 'unfitted' ? first.fit.why : 'none describes the reference'
  return refused(`no recipe could be chosen: ${why}`, 'keep the recipe with --keep-recipe, or give another --bands')
}

const storedOf = (ids: readonly number[], { store }: ReanalysisStations): readonly StoredSpectrum[] =>
  ids.flatMap((id) => store.spectra.get(id) ?? [])

const fitSome = async (
  ids: readonly number[],
  subject: Subject,
  recipe: LockedRecipe,
  into: Map<number, Analysis>,
  stations: ReanalysisStations,
): Promise<Extract<Reanalysed, { kind: 'refused' }> | null> => {
  const stored = storedOf(ids, stations)
  const result = await stations.pool.fit({ raws: stored.map(({ raw }) => raw), context: subject.context, recipe })
  if ('kind' in result) return refused(`fitting stopped: ${result.why}`, 'nothing was changed; try again')
  for (const [i, { id }] of stored.entries()) into.set(id, result.analyses[i]!)
  return null
}

const keepAgain = (
  id: number,
  analysis: Analysis,
  subject: Subject,
  recipe: string,
  stations: ReanalysisStations,
): void => {
  const stored = stations.store.spectra.get(id)
  if (stored === null) return
  const flags = [...new Set([...analysis.flags, ...stored.flags])]
  keepAnalysis(id, stored.raw, subject, { ...analysis, flags }, recipe, stations)
}

/** Every sample and instrument of which spectra are stored that a study claims, those compared with others last. */
export const reanalysable = ({
  store,
  room,
}: Pick<Stations, 'store' | 'room'>): readonly { readonly sample: string; readonly instrument: string }[] => {
  const places = store.spectra
    .lastReceived()
    .flatMap(({ sample }) => store.spectra.instrumentsOf(sample).map((instrument) => ({ sample, instrument })))
  const { config, studyOf } = room()
  const subjects = places.flatMap((place) => {
    const instrument = config.instruments.find(({ name }) => name === place.instrument)
    const subject = instrument === undefined ? null : subjectOf(place.sample, instrument, studyOf, config)
    return subject === null ? [] : [{ place, borrows: referenceSample(subject) !== null }]
  })
  return [...subjects.filter(({ borrows }) => !borrows), ...subjects.filter(({ borrows }) => borrows)].map(
    ({ place }) => place,
  )
}
