import type { Identity } from '../analysis/index.ts'
import type { Analysis } from '../analysis/types.ts'
import { ENGINE } from '../analysis/types.ts'
import { ruleCovers } from '../config/index.ts'
import type { CompiledRule, Judgement, Outcome } from '../rules/types.ts'
import type { Standing, Window } from '../series/types.ts'
import type { StoredArrival } from '../store/arrivals.ts'
import type { JudgedAs } from '../store/judgements.ts'
import { advanceAlarm } from './alarm.ts'
import type { Subject } from './context.ts'
import { occasionsOfRows } from './occasions.ts'
import type { Stations } from './pipeline.ts'
import { referenceStateOf } from './reference.ts'

/** A spectrum that was just stored with its analysis. */
export interface JustKept {
  readonly spectrum: number
  readonly arrival: StoredArrival
  readonly identity: Identity
  readonly subject: Subject
  readonly analysis: Analysis
  /** Hash of the recipe it was fitted with; null where none could be chosen. */
  readonly recipe: string | null
}

/** Longest history that a chart looks back on. */
const LONGEST_LOOK_BACK = 10_000

/** Every rule of the sample on this spectrum, inside the transaction that keeps it. */
export const judge = (kept: JustKept, stations: Stations): void => {
  const rules = stations.room().rules.filter((rule) => concerns(rule, kept.subject))
  if (rules.length === 0) return
  const window = windowOf(kept, rules, stations)
  const undecided: string[] = []
  for (const rule of rules.filter((rule) => rule.definition.condition.kind !== 'always')) {
    const judgement = settle(rule, window, kept, stations)
    const { outcome } = judgement
    if (outcome.kind === 'undecided' && outcome.because === 'missing') undecided.push(rule.definition.name)
  }
  const standing = { ...standingOf(kept), undecided }
  for (const rule of rules.filter((rule) => rule.definition.condition.kind === 'always'))
    settle(rule, { ...window, standing }, kept, stations)
}

const concerns = ({ definition }: CompiledRule, { study }: Subject): boolean =>
  definition.of === 'sample' &&
  (definition.condition.kind === 'expression' ||
    definition.condition.kind === 'chart' ||
    (definition.condition.kind === 'always' && definition.condition.rule !== 'common-change')) &&
  ruleCovers(definition, study.name)

const windowOf = (kept: JustKept, rules: readonly CompiledRule[], stations: Stations): Window => {
  const { store } = stations
  const { sample, instrument, study } = kept.subject
  const lookBack = Math.min(LONGEST_LOOK_BACK, Math.max(1, ...rules.map((rule) => rule.lookBack)))
  const of = { sample, instrument: instrument.name, recipe: kept.recipe, engine: ENGINE }
  // an occasion may hold several replicates: look back on more spectra than occasions
  const rows = store.analyses.window(
    of,
    kept.identity.measuredAt,
    lookBack * (study.replicatesWithinMs === null ? 1 : 6),
  )
  return {
    occasions: occasionsOfRows(rows, kept.subject, store),
    reference: referenceStateOf(kept.subject, stations),
    began: study.began ?? store.spectra.firstMeasuredAt(sample),
    temperatureC: study.temperatureC,
    pathMm: study.pathMm,
    concentrationMolPerL: study.concentrationMolPerL,
    medium: kept.subject.context.prepare.medium,
  }
}

const standingOf = ({ analysis, subject }: JustKept): Omit<Standing, 'undecided'> => ({
  fit: analysis.fit.kind === 'fitted' ? 'fitted' : analysis.fit.flags.includes('no-band') ? 'no-band' : 'unfitted',
  expected: subject.species.bands,
})

/** Judges, writes down the judgement, and moves the alarm. */
const settle = (rule: CompiledRule, window: Window, kept: JustKept, stations: Stations): Judgement => {
  const { store, now } = stations
  const judgement = rule.judge(window)
  const occasion = window.occasions.at(-1)?.at ?? kept.identity.measuredAt
  store.judgements.add({
    spectrum: kept.spectrum,
    rule: rule.definition.name,
    outcome: judgedAs(judgement.outcome),
    what: judgement.outcome.kind === 'undecided' ? judgement.outcome.what : '',
    occasion,
    evidence: judgement.evidence,
    at: now(),
  })
  advanceAlarm({ rule, judgement, occasion, window, kept }, stations)
  return judgement
}

const judgedAs = (outcome: Outcome): JudgedAs =>
  outcome.kind !== 'undecided' ? outcome.kind : outcome.because === 'gathering' ? 'gathering' : 'undecided'
