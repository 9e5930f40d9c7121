// Silence that people ask for. Shelving and being out of service have an end; at that end the alarm shows what is so.
import { stepAlarm } from '../alarms/index.ts'
import type { AlarmFacts } from '../mail/types.ts'
import { type AlarmKey, lifeOf, type StoredAlarm, withLife } from '../store/alarms.ts'
import type { ServicePeriod, ServiceSubject } from '../store/decisions.ts'
import { tellBySubject } from './letter.ts'
import type { Stations } from './pipeline.ts'
import type { UntoldFacts } from './tell.ts'

/**
 * What keeps this alarm out of service now; null when it is in service. An instrument's or a study's alarm follows its
 * own subject. A sample's follows the sample, its study, and the instruments: where the rule rings on some of them, it
 * is silent when all of those are out of service; where it rings on none, when all are that measure the sample.
 */
export const outOfService = (key: AlarmKey, { store, room, now }: Stations): ServicePeriod | null => {
  const at = now()
  const periods = store.decisions.periodsNotOver(at).filter(({ since }) => since <= at)
  if (periods.length === 0) return null
  const periodOf = (of: ServiceSubject, subject: string): ServicePeriod | null =>
    periods.find((period) => period.of === of && period.subject === subject) ?? null
  if (key.of !== 'sample') return periodOf(key.of, key.subject)
  const study = room().studyOf(key.subject)
  const own = periodOf('sample', key.subject) ?? (study === null ? null : periodOf('study', study.name))
  if (own !== null) return own
  const watched = store.alarms.watch(key)
  const ringing = Object.keys(watched).filter((instrument) => watched[instrument])
  const instruments = ringing.length > 0 ? ringing : store.spectra.instrumentsOf(key.subject)
  const theirs = instruments.map((instrument) => periodOf('instrument', instrument))
  return theirs.length > 0 && theirs.every((period) => period !== null) ? theirs[0]! : null
}

/**
 * When what is expected of a sample or instrument could first be expected again: the end of its newest time out of
 * service, or 0. Null while that lasts, for then nothing is overdue.
 */
export const inServiceSince = (of: 'sample' | 'instrument', subject: string, stations: Stations): number | null => {
  const { store, room, now } = stations
  if (outOfService({ rule: '', of, subject }, stations) !== null) return null
  const end = (kind: ServiceSubject, name: string): number => store.decisions.lastServiceEnd(kind, name, now()) ?? 0
  if (of === 'instrument') return end('instrument', subject)
  const study = room().studyOf(subject)
  return Math.max(
    end('sample', subject),
    study === null ? 0 : end('study', study.name),
    ...store.spectra.instrumentsOf(subject).map((instrument) => end('instrument', instrument)),
  )
}

/**
 * Takes an alarm out of service or back, where a person's decision or its end asks for that: row and event. Returns
 * what is to be told. `factsNow`: what is so just now, where somebody knows. Inside a transaction.
 */
export const followService = (
  key: AlarmKey,
  stations: Stations,
  factsNow: (() => UntoldFacts) | null = null,
): AlarmFacts | null => {
  const { store, now } = stations
  const alarm = store.alarms.find(key)
  if (alarm === null) return null
  const period = outOfService(key, stations)
  if ((period !== null) === (alarm.state === 'out-of-service')) return null
  const step = stepAlarm(lifeOf(alarm), period === null ? 'return-to-service' : 'out-of-service', 1)
  if (step.kind === 'refused') return null
  store.alarms.put(withLife(alarm, step.life))
  if (period === null) {
    store.alarms.event(alarm.id, now(), 'returned-to-service', 'tendq', 'its time out of service is over')
    return whatIsSo(alarm, stations, factsNow)
  }
  const until = new Date(period.until).toISOString()
  store.alarms.event(
    alarm.id,
    now(),
    'out-of-service',
    period.by,
    `${period.of} ${period.subject} until ${until}: ${period.why}`,
  )
  return null
}

/** What to say of an alarm that has been silent: that it rings, or that it has returned since people last heard of it. */
export const whatIsSo = (
  alarm: StoredAlarm,
  { store }: Stations,
  factsNow: (() => UntoldFacts) | null,
): AlarmFacts | null => {
  const last = store.letters.last(alarm.id)
  if (alarm.active) {
    const facts = factsNow?.() ?? last?.facts ?? null
    return facts === null ? null : { ...facts, alarm: alarm.id, event: last?.told === true ? 're-alarmed' : 'raised' }
  }
  const heard = store.letters.lastTold(alarm.id)
  if (heard === null || heard.event === 'returned') return null
  // figures of the time when it rang would be read as those of now
  const facts = factsNow?.() ?? { ...heard, evidence: [], parameters: [], also: [] }
  return { ...facts, alarm: alarm.id, event: 'returned' }
}

/** Keeps what a silent alarm would have told, for the day when it speaks again. A letter to nobody. */
export const keepUntold = (facts: AlarmFacts, { store, now }: Stations): void => {
  store.letters.add({ alarm: facts.alarm, facts, subject: facts.ruleTitle }, [], now(), () => '')
}

/** By the clock: ends shelving, takes alarms out of service and back, and tells what rang in silence. */
export const followClock = (stations: Stations): void => {
  const { store, now } = stations
  store.atomically(() => {
    const at = now()
    const told = [
      ...store.alarms.standing().map((alarm) => unshelveIfDue(alarm, at, stations)),
      ...alarmsInQuestion(at, stations).map((alarm) => followService(alarm, stations)),
    ].flatMap((facts) => facts ?? [])
    const untold = store.alarms.standing().flatMap((alarm) => untoldOf(alarm, stations) ?? [])
    const news = [...told, ...untold.filter(({ alarm }) => !told.some((one) => one.alarm === alarm))]
    tellBySubject(news, stations)
  })
}

const alarmsInQuestion = (at: number, { store }: Stations): readonly StoredAlarm[] =>
  store.decisions.periodsNotOver(at).some(({ since }) => since <= at)
    ? store.alarms.all()
    : store.alarms.standing().filter(({ state }) => state === 'out-of-service')

const unshelveIfDue = (alarm: StoredAlarm, at: number, stations: Stations): AlarmFacts | null => {
  if (alarm.state !== 'shelved' || alarm.shelvedUntil === null || alarm.shelvedUntil > at) return null
  const step = stepAlarm(lifeOf(alarm), 'unshelve', 1)
  if (step.kind === 'refused') return null
  stations.store.alarms.put(withLife(alarm, step.life))
  stations.store.alarms.event(alarm.id, at, 'unshelved', 'tendq', 'the time of its shelving is over')
  return whatIsSo(alarm, stations, null)
}

/** An alarm that rang in silence and that a person has unshelved: nobody has heard of it yet. */
const untoldOf = ({ id, state }: StoredAlarm, { store }: Stations): AlarmFacts | null => {
  if (state !== 'unacknowledged') return null
  const last = store.letters.last(id)
  // in the letter of another alarm it may have been told since
  if (last === null || last.told || store.alarms.happened(id, 'told', last.at)) return null
  return { ...last.facts, event: 'raised' }
}
