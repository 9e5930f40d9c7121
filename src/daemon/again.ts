import { unprepared } from '../analysis/index.ts'
import type { RawSpectrum } from '../readers/types.ts'
import { subjectOf } from './context.ts'
import type { JustKept } from './judge.ts'
import type { Stations } from './pipeline.ts'
import { recipeInForce, settleRecipe } from './recipe.ts'

/** A stored spectrum with a fresh analysis that is not stored. */
export interface Again extends JustKept {
  readonly raw: RawSpectrum
}

/** Fits a stored spectrum under its sample's name and recipe of today; null where no study claims it. */
export const analysedAgain = async (spectrum: number, stations: Stations): Promise<Again | null> => {
  const { store, pool, room } = stations
  const { config, studyOf } = room()
  const stored = store.spectra.get(spectrum)
  const arrival = stored === null ? null : store.arrivals.get(stored.arrival)
  const instrument = config.instruments.find(({ name }) => name === stored?.instrument)
  if (stored === null || arrival === null || instrument === undefined) return null
  const { raw, sample, measuredAt, flags } = stored
  const subject = subjectOf(sample, instrument, studyOf, config)
  if (subject === null) return null
  await settleRecipe(subject, stations)
  const state = recipeInForce(subject, stations)
  const result = await pool.fit({ raws: [raw], context: subject.context, recipe: state?.recipe ?? 'choose' })
  const analysis =
    'kind' in result
      ? unprepared(raw, [{ code: 'worker', place: { at: 'fit' }, what: result.why, remedy: 'look at it by hand' }])
      : result.analyses[0]!
  return {
    spectrum,
    arrival,
    identity: { sample, measuredAt, flags, remarks: [] },
    subject,
    analysis: { ...analysis, flags: [...new Set([...analysis.flags, ...flags])] },
    recipe: state?.sha256 ?? null,
    raw,
  }
}
