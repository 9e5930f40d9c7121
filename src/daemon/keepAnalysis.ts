import { quantitiesOf } from '../analysis/index.ts'
import type { Analysis } from '../analysis/types.ts'
import type { RawSpectrum } from '../readers/types.ts'
import { verdictOf } from '../series/index.ts'
import { type Subject, USUAL_PATH_MM } from './context.ts'
import type { Stations } from './pipeline.ts'

/** Stores the analysis of a stored spectrum under the configuration in force. Inside a transaction. */
export const keepAnalysis = (
  spectrum: number,
  raw: RawSpectrum,
  { study, species }: Subject,
  analysis: Analysis,
  recipe: string | null,
  { store, now, room }: Pick<Stations, 'store' | 'now' | 'room'>,
): void => {
  const pathMm = raw.pathMm ?? study.pathMm ?? USUAL_PATH_MM
  const quantities = quantitiesOf(analysis, pathMm)
  store.analyses.add({
    spectrum,
    at: now(),
    configSha256: room().config.sha256,
    study: study.name,
    species: species.name,
    recipe,
    analysis,
    quantities,
    temperatureC: raw.temperatureC ?? study.measuredAtC,
    pathMm,
    verdict: verdictOf(quantities, study.acceptance),
  })
}
