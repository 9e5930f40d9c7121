import { ruleCovers } from '../config/index.ts'
import type { CompiledRule } from '../rules/types.ts'
import type { StoredAlarm } from '../store/alarms.ts'
import type { StoredDecision } from '../store/decisions.ts'
import type { RuleSubject } from '../store/judgements.ts'
import type { Again } from './again.ts'
import { type About, moveAlarm } from './alarm.ts'
import type { Place } from './follow.ts'
import { tellTogether } from './letter.ts'
import type { Stations } from './pipeline.ts'
import { ruleText, type UntoldFacts } from './tell.ts'

/** A rule on a subject whose condition was wound back. */
export interface Wound {
  readonly rule: CompiledRule
  readonly about: About
}

/** How far back judgements are read again. */
const LONGEST_ROW = 1_000

/**
 * Sets each rule's condition on a sample and its instrument to what the judgements of the spectra that still count make
 * of it, up to the one that will be judged again; notes the decision in the story of the alarms that stand.
 */
export const windBack = (
  place: Place,
  again: readonly Again[],
  decision: StoredDecision,
  stations: Stations,
): readonly Wound[] => {
  const { store, room, now } = stations
  const study = room().studyOf(place.sample)
  const wound = room().rules.flatMap((rule): readonly Wound[] => {
    const { definition } = rule
    const { of } = definition
    if (of === 'study' || !isOfSpectra(rule)) return []
    if (of === 'sample' && (study === null || !ruleCovers(definition, study.name))) return []
    return [{ rule, about: { of, subject: of === 'sample' ? place.sample : place.instrument } }]
  })
  for (const { rule, about } of wound) {
    const key = { rule: rule.definition.name, ...about }
    const alarm = store.alarms.find(key)
    if (alarm !== null && alarm.state !== 'normal')
      store.alarms.event(
        alarm.id,
        now(),
        'decision',
        decision.by,
        `${decision.what} ${decision.subject}: ${decision.why}`,
      )
    const of = {
      rule: rule.definition.name,
      sample: about.of === 'sample' ? place.sample : null,
      instrument: place.instrument,
    }
    const holds = conditionBefore(of, judgedAgainAt(about, place, again), rule.definition.persist, stations)
    if (holds !== (store.alarms.watch(key)[place.instrument] ?? false))
      store.alarms.setWatch(key, place.instrument, holds)
  }
  return wound
}

/** Overdue rules follow the clock, and what is common to samples is judged by itself. */
const isOfSpectra = ({ definition: { condition } }: CompiledRule): boolean =>
  condition.kind !== 'overdue' && !(condition.kind === 'always' && condition.rule === 'common-change')

const judgedAgainAt = (about: About, { sample, instrument }: Place, again: readonly Again[]): number =>
  again.findLast(
    ({ subject }) => subject.instrument.name === instrument && (about.of === 'instrument' || subject.sample === sample),
  )?.identity.measuredAt ?? Number.MAX_SAFE_INTEGER

/** The judgements of the occasions before, gone through once more as they came: `persist` in a row ring, one clears. */
const conditionBefore = (of: RuleSubject, before: number, persist: number, { store }: Stations): boolean => {
  let row = 0
  let holds = false
  for (const { outcome } of store.judgements.decidedBefore(of, before, LONGEST_ROW).toReversed()) {
    row = outcome === 'rings' ? row + 1 : 0
    if (row >= persist) holds = true
    if (outcome === 'clears') holds = false
  }
  return holds
}

/** Where judging the newest spectrum could not decide, or none is left, the alarm follows what was wound back. */
export const showWhatIsSo = (wound: readonly Wound[], stations: Stations): void => {
  const { store } = stations
  for (const { rule, about } of wound) {
    const key = { rule: rule.definition.name, ...about }
    const alarm = store.alarms.find(key)
    if (alarm === null) continue
    const isActive = Object.values(store.alarms.watch(key)).some((holds) => holds)
    if (isActive === alarm.active) continue
    const told = moveAlarm(key, isActive, alarm.spectra, rule, stations, () => plainFacts(alarm, rule, about, stations))
    if (told !== null) tellTogether([told], stations)
  }
}

/** The alarm's facts without figures: there is no spectrum behind this change. */
const plainFacts = (
  alarm: StoredAlarm,
  { definition }: CompiledRule,
  about: About,
  stations: Stations,
): UntoldFacts => {
  const study = stations.room().config.studies.find(({ name }) => name === alarm.study)
  return {
    kind: 'alarm',
    room: stations.room().config.room,
    rule: definition.name,
    ruleTitle: definition.title,
    ruleText: ruleText(definition),
    priority: definition.priority,
    ...about,
    study: alarm.study,
    species: study?.species ?? null,
    speciesTitle: null,
    instrument: about.of === 'instrument' ? about.subject : null,
    measuredAt: null,
    since: null,
    spectra: 0,
    evidence: [],
    parameters: [],
    diagnosis: 'unclear',
    confidence: null,
    meaning: 'A person has decided which spectra count; among those that do, the rule finds this.',
    check: [`\`tendq alarms show ${alarm.id}\` tells who decided what, and why.`],
    cautions: [],
    file: null,
  }
}
