import type { Identity } from '../analysis/index.ts'
import type { Analysis } from '../analysis/types.ts'
import { ENGINE } from '../analysis/types.ts'
import { ruleCovers } from '../config/index.ts'
import type { AlarmFacts } from '../mail/types.ts'
import { isMeasured, type JudgedRule, judgeOccasion, lookBackOf } from '../rules/judgeOccasion.ts'
import type { CompiledRule, Outcome } from '../rules/types.ts'
import { departuresOf } from '../series/commonChange.ts'
import type { Standing, Window } from '../series/types.ts'
import type { StoredArrival } from '../store/arrivals.ts'
import type { JudgedAs } from '../store/judgements.ts'
import { type About, advanceAlarm } from './alarm.ts'
import { judgeCommonChange } from './commonChange.ts'
import type { Subject } from './context.ts'
import { tellBySubject, tellTogether } from './letter.ts'
import { occasionsOfRows } from './occasions.ts'
import type { Stations } from './pipeline.ts'
import { windowOf } from './window.ts'

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

/** Every rule that concerns this spectrum's sample or instrument, inside the transaction that keeps it. */
export const judge = (kept: JustKept, stations: Stations): void => {
  const rules = stations.room().rules.filter(({ definition }) => ruleCovers(definition, kept.subject.study.name))
  const told = judgeSample(
    rules.filter(({ definition }) => definition.of === 'sample'),
    kept,
    stations,
  )
  tellBySubject(judgeCommonChange(kept, told, stations), stations)
  judgeInstrument(
    rules.filter(({ definition }) => definition.of === 'instrument'),
    kept,
    stations,
  )
}

const judgeSample = (rules: readonly CompiledRule[], kept: JustKept, stations: Stations): readonly AlarmFacts[] => {
  const { subject, recipe, identity, spectrum } = kept
  const window = windowOf(subject, recipe, identity.measuredAt, rules.filter(isMeasured), stations)
  const newest = window.occasions.at(-1)
  if (newest !== undefined)
    stations.store.departures.add(spectrum, subject.sample, departuresOf(newest, window.reference))
  const about = { of: 'sample', subject: subject.sample } as const
  return judgeOccasion(rules, window, standingOf(kept)).flatMap(
    (judged) => settle(judged, window, kept, about, stations) ?? [],
  )
}

const judgeInstrument = (rules: readonly CompiledRule[], kept: JustKept, stations: Stations): void => {
  const measured = rules.filter(isMeasured)
  if (measured.length === 0) return
  const window = instrumentWindow(kept, measured, stations)
  const about = { of: 'instrument', subject: kept.subject.instrument.name } as const
  const told = measured.flatMap(
    (rule) => settle({ rule, judgement: rule.judge(window) }, window, kept, about, stations) ?? [],
  )
  tellTogether(told, stations)
}

/** Everything that the instrument measured of late. It has no reference: what it measures differs from sample to sample. */
const instrumentWindow = (kept: JustKept, rules: readonly CompiledRule[], { store }: Stations): Window => {
  const of = { instrument: kept.subject.instrument.name, engine: ENGINE }
  const rows = store.analyses.windowOfInstrument(of, kept.identity.measuredAt, lookBackOf(rules))
  return {
    occasions: occasionsOfRows(
      rows,
      { ...kept.subject, study: { ...kept.subject.study, replicatesWithinMs: null } },
      store,
    ),
    reference: { kind: 'refused', why: 'an instrument has no reference, its samples have' },
    began: null,
    temperatureC: null,
    pathMm: null,
    concentrationMolPerL: null,
    medium: kept.subject.context.prepare.medium,
  }
}

const standingOf = ({ analysis, subject }: JustKept): Omit<Standing, 'undecided'> => ({
  fit: analysis.fit.kind === 'fitted' ? 'fitted' : analysis.fit.flags.includes('no-band') ? 'no-band' : 'unfitted',
  expected: subject.species.bands,
})

/** Writes down the judgement, and moves the alarm. Returns what is to be told, if anything is. */
const settle = (
  { rule, judgement }: JudgedRule,
  window: Window,
  kept: JustKept,
  about: About,
  stations: Stations,
): AlarmFacts | null => {
  const { store, now } = stations
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
  return advanceAlarm({ rule, judgement, occasion, window, kept, about }, stations)
}

const judgedAs = (outcome: Outcome): JudgedAs =>
  outcome.kind !== 'undecided' ? outcome.kind : outcome.because === 'gathering' ? 'gathering' : 'undecided'
