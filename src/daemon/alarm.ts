import { conditionAfter } from '../alarms/condition.ts'
import { stepAlarm } from '../alarms/index.ts'
import type { AlarmFacts } from '../mail/types.ts'
import type { CompiledRule, Judgement } from '../rules/types.ts'
import type { Window } from '../series/types.ts'
import { type AlarmKey, lifeOf, type StoredAlarm, withLife } from '../store/alarms.ts'
import type { RuleSubject } from '../store/judgements.ts'
import type { JustKept } from './judge.ts'
import type { Stations } from './pipeline.ts'
import { followService, keepUntold, outOfService } from './service.ts'
import { factsOf, messageOf, type UntoldFacts } from './tell.ts'

export interface Judged {
  readonly rule: CompiledRule
  readonly judgement: Judgement
  /** Time of the occasion judged. */
  readonly occasion: number
  readonly window: Window
  readonly kept: JustKept
  readonly about: About
}

/** Whom an alarm is about. */
export interface About {
  readonly of: 'sample' | 'instrument' | 'study'
  readonly subject: string
}

/** Moves the alarm of a sample or instrument by one judgement: `persist` occasions in a row ring it, one clears it. */
export const advanceAlarm = (judged: Judged, stations: Stations): AlarmFacts | null => {
  const { rule, judgement, occasion, kept, about } = judged
  const { store } = stations
  const { outcome } = judgement
  if (outcome.kind === 'undecided') return null
  const { name, persist } = rule.definition
  const key: AlarmKey = { rule: name, ...about }
  const on = kept.subject.instrument.name
  const of = { rule: name, sample: about.of === 'sample' ? about.subject : null, instrument: on }
  const before = store.alarms.watch(key)
  const row = outcome.kind === 'rings' ? [occasion, ...ringingBefore(of, occasion, stations)] : []
  const was = before[on] ?? false
  const isLate = outcome.kind === 'clears' && store.judgements.hasLater(of, occasion)
  const is = conditionAfter(was, outcome.kind, { row: row.length, persist, isLate })
  if (is !== was) store.alarms.setWatch(key, on, is)
  const isActive = Object.entries({ ...before, [on]: is }).some(([, active]) => active)
  return moveAlarm(key, isActive, row.length, rule, stations, () => factsOf(judged, row, stations))
}

/** Occasions in a row, before this one, on which the rule rang; undecided ones neither add nor break. Newest first. */
const ringingBefore = (of: RuleSubject, occasion: number, { store }: Stations): readonly number[] => {
  const decided = store.judgements.decidedBefore(of, occasion, LONGEST_ROW)
  const broken = decided.findIndex(({ outcome }) => outcome !== 'rings')
  return (broken === -1 ? decided : decided.slice(0, broken)).map((one) => one.occasion)
}

/** How far back a row of ringing occasions is counted. */
const LONGEST_ROW = 1_000

/** Takes the alarm's condition as true or false: row and event. Returns what is to be told, if anything is. */
export const moveAlarm = (
  key: AlarmKey,
  isActive: boolean,
  spectra: number,
  rule: CompiledRule,
  stations: Stations,
  factsNow: () => UntoldFacts,
): AlarmFacts | null => {
  const ofService = followService(key, stations, factsNow)
  return moveInService(key, isActive, spectra, rule, stations, factsNow) ?? ofService
}

const moveInService = (
  key: AlarmKey,
  isActive: boolean,
  spectra: number,
  { definition }: CompiledRule,
  stations: Stations,
  factsNow: () => UntoldFacts,
): AlarmFacts | null => {
  const { store, now } = stations
  const alarm: Omit<StoredAlarm, 'id'> = store.alarms.find(key) ?? {
    ...key,
    study: null,
    priority: definition.priority,
    state: outOfService(key, stations) === null ? 'normal' : 'out-of-service',
    active: false,
    latch: definition.latch,
    latched: false,
    shelvedUntil: null,
    raisedAt: null,
    acknowledgedAt: null,
    acknowledgedBy: null,
    returnedAt: null,
    spectra: 0,
    diagnosis: null,
    confidence: null,
    message: definition.title,
  }
  if (!isActive && !alarm.active) return null
  if (isActive && alarm.active) {
    store.alarms.put({ ...alarm, spectra: Math.max(spectra, alarm.spectra) })
    return null
  }
  const step = stepAlarm(lifeOf(alarm), isActive ? 'rings' : 'clears', 1)
  if (step.kind === 'refused') return null
  const at = now()
  const facts = factsNow()
  const message = messageOf(facts)
  const id = store.alarms.put({
    ...withLife(alarm, step.life),
    study: facts.study,
    priority: definition.priority,
    latch: definition.latch,
    raisedAt: isActive ? at : alarm.raisedAt,
    returnedAt: isActive ? null : at,
    acknowledgedAt: isActive ? null : alarm.acknowledgedAt,
    acknowledgedBy: isActive ? null : alarm.acknowledgedBy,
    spectra: isActive ? spectra : alarm.spectra,
    diagnosis: isActive ? facts.diagnosis : alarm.diagnosis,
    confidence: isActive ? facts.confidence : alarm.confidence,
    message: isActive ? message : alarm.message,
  })
  store.alarms.event(id, at, isActive ? 'raised' : 'returned', 'tendq', message)
  const { notice } = step
  if (notice === 'none' && isActive) keepUntold({ ...facts, alarm: id, event: 'raised' }, stations)
  return notice === 'raised' || notice === 'returned' || notice === 're-alarmed'
    ? { ...facts, alarm: id, event: notice }
    : null
}
