// Alarms of samples that tell no more than a common change: suppressed by design, listed, and heard again when they do.
import { stepAlarm } from '../alarms/index.ts'
import type { AlarmFacts } from '../mail/types.ts'
import { isMeasured } from '../rules/judgeOccasion.ts'
import type { CompiledRule } from '../rules/types.ts'
import { withoutCommon } from '../series/commonChange.ts'
import { lifeOf, type StoredAlarm, withLife } from '../store/alarms.ts'
import { commonChangeOver } from './commonChange.ts'
import { subjectOf } from './context.ts'
import { addLetter, tellBySubject } from './letter.ts'
import type { Stations } from './pipeline.ts'
import { keepUntold, whatIsSo } from './service.ts'
import { windowOf } from './window.ts'

/**
 * Looks through the alarms of these samples: what a common change explains falls silent, what it no longer explains
 * speaks again. Returns what is to be told: of `told` what did not fall silent, and what speaks again.
 */
export const reviewSuppressed = (
  samples: readonly string[],
  told: readonly AlarmFacts[],
  stations: Stations,
): readonly AlarmFacts[] => {
  const hushed = new Set<number>()
  const speaking: AlarmFacts[] = []
  for (const alarm of stations.store.alarms.standing()) {
    if (alarm.of !== 'sample' || !samples.includes(alarm.subject)) continue
    const by = alarm.active ? explainedBy(alarm, stations) : null
    if (by === null) {
      if (alarm.state === 'suppressed-by-design') speaking.push(...speak(alarm, stations))
    } else if (alarm.state !== 'suppressed-by-design') {
      const fresh = told.find((facts) => facts.alarm === alarm.id) ?? null
      if (hush(alarm, by, fresh, stations)) hushed.add(alarm.id)
    }
  }
  return [...told.filter(({ alarm }) => !hushed.has(alarm)), ...speaking]
}

/** The alarm of a common change that accounts for all that this one tells; null where there is none, or where something is left. */
const explainedBy = (alarm: StoredAlarm, stations: Stations): StoredAlarm | null => {
  const rule = stations.room().rules.find(({ definition }) => definition.name === alarm.rule)
  if (rule === undefined || !isMeasured(rule)) return null
  const watched = stations.store.alarms.watch(alarm)
  const ringing = Object.keys(watched).filter((instrument) => watched[instrument])
  const causes = ringing.map((instrument) => explainedOn(rule, alarm.subject, instrument, stations))
  return causes.every((cause) => cause !== null) ? (causes[0] ?? null) : null
}

/** The rule judges what the sample did by itself: its newest occasions with the common part taken out. */
const explainedOn = (rule: CompiledRule, sample: string, on: string, stations: Stations): StoredAlarm | null => {
  const { store, room } = stations
  const { config, studyOf } = room()
  const change = commonChangeOver(sample, on, stations)
  const instrument = config.instruments.find(({ name }) => name === on)
  const subject = instrument === undefined ? null : subjectOf(sample, instrument, studyOf, config)
  if (change === null || subject === null) return null
  const recipe = store.recipes.of(sample, on)?.sha256 ?? null
  const window = windowOf(subject, recipe, change.at, [rule], stations)
  const own = { ...window, occasions: withoutCommon(window.occasions, change.parts, change.since) }
  const { kind } = rule.judge(own).outcome
  return kind === 'clears' || kind === 'holds' ? store.alarms.find(change.key) : null
}

/** Suppresses the alarm; letters about it that wait are withdrawn, who has had one gets a follow-up. */
const hush = (alarm: StoredAlarm, by: StoredAlarm, fresh: AlarmFacts | null, stations: Stations): boolean => {
  const { store, now } = stations
  const step = stepAlarm(lifeOf(alarm), 'suppress', 1)
  if (step.kind === 'refused') return false
  const why = `alarm ${by.id} explains it: ${by.message}`
  store.alarms.put(withLife(alarm, step.life))
  store.alarms.event(alarm.id, now(), 'suppressed', 'tendq', why)
  store.alarms.event(by.id, now(), 'suppresses', 'tendq', `alarm ${alarm.id}, ${alarm.subject}: ${alarm.message}`)
  if (fresh !== null) {
    keepUntold(fresh, stations)
    return true
  }
  withdrawWaiting(alarm, why, stations)
  const heard = store.letters.sentTo(alarm.id, alarm.raisedAt ?? 0)
  const last = store.letters.lastTold(alarm.id)
  if (heard.length > 0 && last !== null) addLetter(explained(last, by), stations, heard)
  return true
}

/** What those hear who had a letter about an alarm that a common change explains. */
export const explained = (last: AlarmFacts, by: Pick<StoredAlarm, 'id' | 'message'>): AlarmFacts => ({
  ...last,
  event: 'suppressed',
  also: [],
  explainedBy: `alarm ${by.id} (${by.message})`,
})

/** A letter that tells of other alarms too, which are not silent, goes out all the same. */
const withdrawWaiting = (alarm: StoredAlarm, why: string, { store }: Stations): void => {
  for (const { id, facts } of store.letters.waitingOf(alarm.id)) {
    const others = facts.kind === 'alarm' ? (facts.alsoAlarms ?? []) : []
    const isAlone = others.every((other) => store.alarms.get(other)?.state === 'suppressed-by-design')
    if (isAlone) store.letters.withdraw(id, why)
  }
}

/** The alarm shows what is so. */
const speak = (alarm: StoredAlarm, stations: Stations): readonly AlarmFacts[] => {
  const { store, now } = stations
  const step = stepAlarm(lifeOf(alarm), 'unsuppress', 1)
  if (step.kind === 'refused') return []
  store.alarms.put(withLife(alarm, step.life))
  const why = alarm.active ? 'no common change explains it any more' : 'its condition is over'
  store.alarms.event(alarm.id, now(), 'unsuppressed', 'tendq', why)
  const facts = whatIsSo(alarm, stations, null)
  return facts === null ? [] : [facts]
}

/** How long after a common change is over a sample that is not measured any more may stay silent. */
const LONGEST_SILENCE_MS = 36 * 3_600_000

/** By the clock: a suppressed alarm whose sample is never measured again must not be silent for ever. */
export const followCommonChanges = (stations: Stations): void =>
  stations.store.atomically(() => tellBySubject(heardAgain(stations), stations))

const heardAgain = (stations: Stations): readonly AlarmFacts[] => {
  const { store, now } = stations
  const standing = store.alarms.all()
  const changes = standing.filter(({ rule }) => isOfCommonChange(rule, stations))
  const isOver = changes.every(
    ({ active, returnedAt }) => !active && (returnedAt === null || now() - returnedAt > LONGEST_SILENCE_MS),
  )
  if (!isOver) return []
  return standing.filter(({ state }) => state === 'suppressed-by-design').flatMap((alarm) => speak(alarm, stations))
}

const isOfCommonChange = (rule: string, { room }: Stations): boolean =>
  room().rules.some(
    ({ definition: { name, condition } }) =>
      name === rule && condition.kind === 'always' && condition.rule === 'common-change',
  )
