import { ENGINE } from '../analysis/types.ts'
import { lookBackOf } from '../rules/judgeOccasion.ts'
import type { CompiledRule } from '../rules/types.ts'
import type { Window } from '../series/types.ts'
import type { Subject } from './context.ts'
import { occasionsOfRows } from './occasions.ts'
import type { Stations } from './pipeline.ts'
import { referenceStateOf } from './reference.ts'

/** What these rules look at when they judge the sample's newest occasion up to a time on its instrument. */
export const windowOf = (
  subject: Subject,
  recipe: string | null,
  until: number,
  rules: readonly CompiledRule[],
  stations: Stations,
): Window => {
  const { store } = stations
  const { sample, instrument, study } = subject
  const of = { sample, instrument: instrument.name, recipe, engine: ENGINE }
  // an occasion may hold several replicates: look back on more spectra than occasions
  const rows = store.analyses.window(of, until, lookBackOf(rules) * (study.replicatesWithinMs === null ? 1 : 6))
  return {
    occasions: occasionsOfRows(rows, subject, store),
    reference: referenceStateOf(subject, stations),
    began: study.began ?? store.spectra.firstMeasuredAt(sample),
    temperatureC: study.temperatureC,
    pathMm: study.pathMm,
    concentrationMolPerL: study.concentrationMolPerL,
    medium: subject.context.prepare.medium,
  }
}
