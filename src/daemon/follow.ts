import { ENGINE } from '../analysis/types.ts'
import type { StoredDecision } from '../store/decisions.ts'
import { type Again, analysedAgain } from './again.ts'
import { judge } from './judge.ts'
import { chosenJustNow, isStorageFault } from './keep.ts'
import { keepAnalysis } from './keepAnalysis.ts'
import type { Stations } from './pipeline.ts'
import { settleRecipe } from './recipe.ts'
import { showWhatIsSo, windBack } from './windBack.ts'

/** A sample as one instrument measures it. */
export interface Place {
  readonly sample: string
  readonly instrument: string
}

/**
 * Draws the consequences of what people decided about spectra and references, in the order of the decisions: what is
 * reassigned is analysed anew, and the newest spectrum that counts is judged again, so that no alarm goes on ringing for
 * one that no longer does. Returns the number of decisions followed. A crash in between is followed at the next start.
 */
export const followDecisions = async (stations: Stations): Promise<number> => {
  const { store, log, now } = stations
  const decisions = store.decisions.unfollowed()
  for (const decision of decisions) {
    try {
      await follow(decision, stations)
    } catch (error) {
      if (isStorageFault(error)) throw error
      log.error({ err: error, decision: decision.id }, 'a decision could not be followed')
      store.atomically(() => store.decisions.markFollowed(decision.id, now(), String(error)))
    }
  }
  return decisions.length
}

const follow = async (decision: StoredDecision, stations: Stations): Promise<void> => {
  const { store, now } = stations
  const moved = store.decisions.reassignmentOf(decision.id)
  if (moved !== null) await analyseUnderItsName(moved.spectrum, stations)
  const touched = touchedBy(decision, stations)
  const again = await newestOf(touched, moved?.spectrum ?? null, stations)
  store.atomically(() => {
    const wound = touched.flatMap((place) => windBack(place, again, decision, stations))
    for (const one of again) judge(one, stations)
    showWhatIsSo(wound, stations)
    store.decisions.markFollowed(decision.id, now())
  })
}

/** A spectrum that a person gave its right name, by the species and the recipe of that sample. Not where no study claims it. */
const analyseUnderItsName = async (spectrum: number, stations: Stations): Promise<void> => {
  const { store } = stations
  const one = await analysedAgain(spectrum, stations)
  if (one === null) return
  store.atomically(() => {
    const recipe = one.recipe ?? chosenJustNow(spectrum, one.subject, one.analysis, stations)
    keepAnalysis(spectrum, one.raw, one.subject, one.analysis, recipe, stations)
  })
  await settleRecipe(one.subject, stations)
}

/** Samples whose windows or references the decision changes, those included that are compared with such a sample. */
const touchedBy = (decision: StoredDecision, stations: Stations): readonly Place[] => {
  const { store } = stations
  const moved = store.decisions.reassignmentOf(decision.id)
  const number = Number(/^spectrum (\d+)$/.exec(decision.subject)?.[1])
  const spectrum = Number.isInteger(number) ? store.spectra.get(number) : null
  const samples =
    spectrum === null
      ? store.decisions.approvedBy(decision.id)
      : [moved?.was ?? null, moved?.sample ?? spectrum.sample].flatMap((sample) =>
          sample === null ? [] : [{ sample, instrument: spectrum.instrument }],
        )
  return samples.flatMap((place) => [place, ...comparedWith(place, stations)])
}

const comparedWith = ({ sample, instrument }: Place, { store, room }: Stations): readonly Place[] =>
  store.spectra.lastReceived().flatMap((other) => {
    const reference = room().studyOf(other.sample)?.reference
    return other.sample !== sample && reference?.kind === 'sample' && reference.sample === sample
      ? [{ sample: other.sample, instrument }]
      : []
  })

/** What is judged again: the newest spectrum that counts of each sample and instrument, and the reassigned one at its own place. */
const newestOf = async (
  touched: readonly Place[],
  moved: number | null,
  stations: Stations,
): Promise<readonly Again[]> => {
  const { store } = stations
  const newest = touched.flatMap(({ sample, instrument }) => {
    const recipe = store.recipes.of(sample, instrument)?.sha256 ?? null
    return [
      ...store.analyses.window({ sample, instrument, recipe, engine: ENGINE }, Number.MAX_SAFE_INTEGER, 1),
      ...store.analyses.windowOfInstrument({ instrument, engine: ENGINE }, Number.MAX_SAFE_INTEGER, 1),
    ].map(({ spectrum }) => spectrum)
  })
  const ids = new Set([...newest, ...(moved === null || store.decisions.isExcluded(moved) ? [] : [moved])])
  const again: Again[] = []
  for (const id of ids) again.push(...[await analysedAgain(id, stations)].flatMap((one) => one ?? []))
  return again.toSorted((a, b) => a.identity.measuredAt - b.identity.measuredAt)
}
