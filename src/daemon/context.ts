import type { AnalysisContext } from '../analysis/types.ts'
import { findIon } from '../chemistry/ions.ts'
import type { Config, Instrument, Species, Study } from '../config/types.ts'

/** What a sample's name and instrument mean under this configuration. */
export interface Subject {
  readonly sample: string
  readonly instrument: Instrument
  readonly study: Study
  readonly species: Species
  readonly context: AnalysisContext
}

/** Cell that heights are given for when neither file nor study names one; the trade's usual cell. */
export const USUAL_PATH_MM = 10

/** Null where no study claims the sample: such a spectrum is kept and judged by no rule. */
export const subjectOf = (
  sample: string | null,
  instrument: Instrument,
  studyOf: (sample: string) => Study | null,
  config: Config,
): Subject | null => {
  if (sample === null) return null
  const study = studyOf(sample)
  if (study === null) return null
  const species = config.species.find(({ name }) => name === study.species)
  const found = species === undefined ? null : findIon(species.ion)
  if (species === undefined || found === null || found.kind === 'unknown') return null
  return {
    sample,
    instrument,
    study,
    species,
    context: {
      prepare: {
        medium: instrument.reading.medium ?? 'air',
        absorbanceLimit: instrument.absorbanceLimit,
        bandwidthNm: instrument.wavelength.bandwidthNm,
        ...(instrument.reading.y === undefined ? {} : { y: instrument.reading.y }),
      },
      ion: found.ion,
      geometry: species.geometry,
      spin: species.spin,
      expected: species.bands,
      bands: null,
      repeatabilityNm: instrument.wavelength.repeatabilityNm,
    },
  }
}
