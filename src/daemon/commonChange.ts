// `common-change`: samples on an instrument, or of a study, that moved together are one alarm and not twelve.
import { conditionAfter } from '../alarms/condition.ts'
import { isControl, ruleCovers } from '../config/index.ts'
import type { AlarmFacts } from '../mail/types.ts'
import { isMeasured } from '../rules/judgeOccasion.ts'
import type { CompiledRule } from '../rules/types.ts'
import { type CommonPart, commonParts, type SampleDepartures, scaleOf } from '../series/commonChange.ts'
import type { AlarmKey } from '../store/alarms.ts'
import { moveAlarm } from './alarm.ts'
import { commonFacts, tellCommonChange } from './commonFacts.ts'
import type { JustKept } from './judge.ts'
import type { Stations } from './pipeline.ts'
import { reviewSuppressed } from './suppress.ts'

/** An alarm of the rule with what it stands for now. */
export interface CommonChange {
  readonly key: AlarmKey
  readonly parts: readonly CommonPart[]
  /** Time of the newest spectrum that was looked at. */
  readonly at: number
  /** Occasions from here on hold the change. */
  readonly since: number
  readonly samples: readonly SampleDepartures[]
}

const DAY_MS = 86_400_000
/** A sample counts as long as its newest spectrum is no older than this many intervals of its schedule. */
const FRESH = 1.5
/** Longest interval that is waited for. */
const LONGEST_MS = 14 * DAY_MS
/** A change below this part of what made it ring counts as over. */
const DEADBAND = 0.7
const LONGEST_ROW = 1_000

/**
 * Judges the newest state of the instrument (or study) that a kept spectrum belongs to, moves the one alarm, and
 * silences those alarms of samples that say nothing else. Returns what of `told` is still to be told, and what speaks again.
 */
export const judgeCommonChange = (
  kept: JustKept,
  told: readonly AlarmFacts[],
  stations: Stations,
): readonly AlarmFacts[] => {
  const rule = stations.room().rules.find(({ definition: { condition } }) => isCommonChange(condition))
  if (rule === undefined || !ruleCovers(rule.definition, kept.subject.study.name)) return told
  const { of } = rule.definition
  const about = {
    of: of === 'study' ? of : ('instrument' as const),
    subject: of === 'study' ? kept.subject.study.name : kept.subject.instrument.name,
  }
  const key: AlarmKey = { rule: rule.definition.name, ...about }
  const samples = samplesOf(key, kept.subject.instrument.name, stations)
  const parts = commonParts(samples.list)
  const wasActive = stations.store.alarms.find(key)?.active ?? false
  const change = { key, parts, at: samples.at, since: samples.at - samples.intervalMs, samples: samples.list }
  const news = move(rule, kept, change, stations)
  const isActive = stations.store.alarms.find(key)?.active ?? false
  // the moment it begins, alarms of all samples are looked through; later those of the sample that was measured
  const touched = isActive && !wasActive ? samples.list.map(({ sample }) => sample) : [kept.subject.sample]
  const reviewed = reviewSuppressed(touched, told, stations)
  if (news !== null) tellCommonChange(news, samples.list, stations)
  return reviewed
}

const isCommonChange = (condition: CompiledRule['definition']['condition']): boolean =>
  condition.kind === 'always' && condition.rule === 'common-change'

/** The alarm of `common-change` that now stands for a sample on an instrument, with what is common; null where none does. */
export const commonChangeOver = (sample: string, instrument: string, stations: Stations): CommonChange | null => {
  const { store, room } = stations
  const study = room().studyOf(sample)
  const rule = room().rules.find(({ definition: { condition } }) => isCommonChange(condition))
  if (rule === undefined || study === null || !ruleCovers(rule.definition, study.name)) return null
  const of = rule.definition.of === 'study' ? 'study' : 'instrument'
  const key: AlarmKey = { rule: rule.definition.name, of, subject: of === 'study' ? study.name : instrument }
  const alarm = store.alarms.find(key)
  // shelved or out of service it still explains: who silenced it did not ask for twelve alarms in its place
  if (alarm?.active !== true) return null
  const { list, at, intervalMs } = samplesOf(key, instrument, stations)
  if (!list.some((one) => one.sample === sample)) return null
  const first = ringingSince(key.rule, instrument, at, stations)
  return { key, parts: commonParts(list), at, since: first - intervalMs, samples: list }
}

/** Newest departures of the samples that were measured of late, on one instrument or, for a study, on any. */
const samplesOf = (key: AlarmKey, instrument: string, { store, room }: Stations) => {
  const { config, studyOf } = room()
  const names = key.of === 'study' ? config.instruments.map(({ name }) => name) : [instrument]
  const at = Math.max(0, ...names.map((name) => store.departures.newestAt(name) ?? 0))
  const every = (sample: string, on: string): number =>
    studyOf(sample)?.everyMs ?? config.instruments.find(({ name }) => name === on)?.everyMs ?? DAY_MS
  const rows = names
    .flatMap((name) => store.departures.newestBetween(name, at - FRESH * LONGEST_MS, at))
    .filter((row) => row.at >= at - FRESH * Math.min(LONGEST_MS, every(row.sample, row.instrument)))
    .filter(({ sample }) => (key.of === 'study' ? studyOf(sample)?.name === key.subject : studyOf(sample) !== null))
    .toSorted((a, b) => a.at - b.at)
  const newest = [...new Map(rows.map((row) => [row.sample, row])).values()]
  const list = newest.map(
    ({ sample, departures }): SampleDepartures => ({
      sample,
      control: isControl(studyOf(sample)!, sample),
      departures,
    }),
  )
  return { list, at, intervalMs: Math.max(0, ...newest.map((row) => every(row.sample, row.instrument))) }
}

/** Writes down the judgement and moves the alarm. */
const move = (rule: CompiledRule, kept: JustKept, change: CommonChange, stations: Stations): AlarmFacts | null => {
  const { store, now, room } = stations
  const { key, parts, at } = change
  if (parts.length === 0) return null
  const instrument = kept.subject.instrument.name
  const accuracyNm = room().config.instruments.find(({ name }) => name === instrument)?.wavelength.accuracyNm ?? 0
  const ringing = ringingSamples(stations)
  const verdicts = parts.map((part) => verdictOn(part, accuracyNm, ringing))
  const outcome = verdicts.includes('rings') ? 'rings' : verdicts.every((one) => one === 'clears') ? 'clears' : 'holds'
  store.judgements.add({
    spectrum: kept.spectrum,
    rule: rule.definition.name,
    outcome,
    what: '',
    occasion: at,
    evidence: [],
    at: now(),
  })
  const row = outcome === 'rings' ? rowOf(key.rule, instrument, at, (one) => one !== 'rings', stations).length + 1 : 0
  const was = store.alarms.watch(key)[key.subject] ?? false
  const is = conditionAfter(was, outcome, { row, persist: rule.definition.persist })
  if (is !== was) store.alarms.setWatch(key, key.subject, is)
  const moving = parts.filter((_, i) => verdicts[i] !== 'clears')
  return moveAlarm(key, is, row, rule, stations, () => commonFacts(rule, kept, { ...change, parts: moving }, stations))
}

/** Samples by the quantities on which alarms of their own ring, suppressed ones included. */
const ringingSamples = ({ store, room }: Stations): readonly { subject: string; quantities: readonly string[] }[] =>
  store.alarms.standing().flatMap(({ active, of, subject, rule }) => {
    const compiled = room().rules.find(({ definition }) => definition.name === rule)
    return active && of === 'sample' && compiled !== undefined && isMeasured(compiled)
      ? [{ subject, quantities: compiled.quantities }]
      : []
  })

/**
 * A change rings when it is significant and either more than the maker of the instrument grants (positions), or when two
 * of the samples' own alarms ring for it: then there is something to put together.
 */
const verdictOn = (
  { standing, together, quantity, c }: CommonPart,
  accuracyNm: number,
  ringing: ReturnType<typeof ringingSamples>,
): CommonPart['standing'] => {
  if (standing === 'clears') return 'clears'
  const own = ringing.filter(({ subject, quantities }) => together.includes(subject) && quantities.includes(quantity))
  const isPutTogether = new Set(own.map(({ subject }) => subject)).size >= 2
  const limit = scaleOf(quantity) === 'nm' ? accuracyNm : Number.POSITIVE_INFINITY
  if (standing === 'rings' && (isPutTogether || Math.abs(c) > limit)) return 'rings'
  return isPutTogether || Math.abs(c) > DEADBAND * limit ? 'holds' : 'clears'
}

/** Times before this one at which the rule decided, newest first, back to the last at which it said an end. */
const rowOf = (
  rule: string,
  instrument: string,
  before: number,
  isEnd: (outcome: string) => boolean,
  { store }: Stations,
): readonly number[] => {
  const decided = store.judgements.decidedBefore({ rule, sample: null, instrument }, before, LONGEST_ROW)
  const broken = decided.findIndex(({ outcome }) => isEnd(outcome))
  return (broken === -1 ? decided : decided.slice(0, broken)).map(({ occasion }) => occasion)
}

const ringingSince = (rule: string, instrument: string, at: number, stations: Stations): number =>
  rowOf(rule, instrument, at, (outcome) => outcome === 'clears', stations).at(-1) ?? at
