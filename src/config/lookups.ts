import type { Config, Species, Study } from './types.ts'
import { fits } from './wildcard.ts'

/** The study that claims a sample, by its exact name or a wildcard; null where none does. The checks left at most one. */
export const studyOf = (config: Config, sample: string): Study | null =>
  config.studies.find(({ samples }) => samples.some(({ name }) => fits(name, sample))) ?? null

/** What the samples of a study are; null for a check study on a standard. */
export const speciesOf = (config: Config, study: Study): Species | null =>
  config.species.find(({ name }) => name === study.species) ?? null

/** Whether a sample is a control of its study: an entry with its exact name decides before wildcards do. */
export const isControl = (study: Study, sample: string): boolean =>
  (study.samples.find(({ name }) => name === sample) ?? study.samples.find(({ name }) => fits(name, sample)))
    ?.control ?? false

/** Whether a rule is judged for a study. */
export const ruleCovers = (rule: { readonly studies: readonly string[] }, study: string): boolean =>
  rule.studies.some((pattern) => fits(pattern, study))
