import { ruleCovers } from '../config/index.ts'
import type { Study } from '../config/types.ts'
import { judgeOverdue, judgeOverdueSchedule } from '../rules/index.ts'
import type { CompiledRule, Outcome } from '../rules/types.ts'
import { moveAlarm } from './alarm.ts'
import { addLetter } from './letter.ts'
import type { Stations } from './pipeline.ts'
import { inServiceSince } from './service.ts'
import { ruleText, type UntoldFacts } from './tell.ts'

/** Judges by the clock what no spectrum can tell: that none came. One transaction for all rules and subjects. */
export const judgeOverdueSamples = (stations: Stations): void => {
  const { store, room } = stations
  const rules = room().rules.filter(({ definition }) => definition.condition.kind === 'overdue')
  if (rules.length === 0) return
  store.atomically(() => {
    for (const rule of rules) {
      if (rule.definition.of === 'sample') judgeSamples(rule, stations)
      if (rule.definition.of === 'instrument') judgeInstruments(rule, stations)
    }
  })
}

const timesOf = ({ definition: { condition } }: CompiledRule): number =>
  condition.kind === 'overdue' ? condition.times : 2

const judgeSamples = (rule: CompiledRule, stations: Stations): void => {
  const { store, room, now } = stations
  for (const { sample, receivedAt } of store.spectra.lastReceived()) {
    const study = room().studyOf(sample)
    if (study === null || !ruleCovers(rule.definition, study.name)) continue
    const since = inServiceSince('sample', sample, stations)
    if (since === null) continue
    const outcome = sampleOutcome(study, timesOf(rule), sample, Math.max(receivedAt, since), now(), stations)
    if (outcome !== null) move(rule, 'sample', sample, outcome, receivedAt, study.name, stations)
  }
}

/** Null where the study has no schedule. */
const sampleOutcome = (
  study: Study,
  times: number,
  sample: string,
  receivedAt: number,
  now: number,
  { store }: Stations,
): Outcome | null => {
  if (study.ends !== null && now > study.ends) return { kind: 'clears' }
  if (study.everyMs !== null) return judgeOverdue(times, study.everyMs, receivedAt, now)
  if (study.scheduleMs === null) return null
  const began = study.began ?? store.spectra.firstMeasuredAt(sample)
  return began === null ? null : judgeOverdueSchedule(times, { began, agesMs: study.scheduleMs }, receivedAt, now)
}

const judgeInstruments = (rule: CompiledRule, stations: Stations): void => {
  const { store, room, now } = stations
  for (const { name, everyMs } of room().config.instruments) {
    const last = store.arrivals.lastReceivedAt(name)
    if (everyMs === null || last === null) continue
    const since = inServiceSince('instrument', name, stations)
    if (since === null) continue
    const outcome = judgeOverdue(timesOf(rule), everyMs, Math.max(last, since), now())
    move(rule, 'instrument', name, outcome, last, null, stations)
  }
}

const move = (
  rule: CompiledRule,
  of: 'sample' | 'instrument',
  subject: string,
  outcome: Outcome,
  lastReceivedAt: number,
  study: string | null,
  stations: Stations,
): void => {
  if (outcome.kind !== 'rings' && outcome.kind !== 'clears') return
  const key = { rule: rule.definition.name, of, subject }
  const told = moveAlarm(key, outcome.kind === 'rings', 0, rule, stations, () =>
    overdueFacts(rule, of, subject, lastReceivedAt, study, stations),
  )
  if (told !== null) addLetter(told, stations)
}

const overdueFacts = (
  { definition }: CompiledRule,
  of: 'sample' | 'instrument',
  subject: string,
  lastReceivedAt: number,
  study: string | null,
  { room }: Stations,
): UntoldFacts => ({
  kind: 'alarm',
  room: room().config.room,
  rule: definition.name,
  ruleTitle: definition.title,
  ruleText: ruleText(definition),
  priority: definition.priority,
  of,
  subject,
  study,
  species: null,
  speciesTitle: null,
  instrument: of === 'instrument' ? subject : null,
  measuredAt: null,
  since: new Date(lastReceivedAt).toISOString(),
  spectra: 0,
  evidence: [],
  parameters: [],
  diagnosis: 'unclear',
  confidence: null,
  meaning: `The last file came at ${new Date(lastReceivedAt).toISOString()}. A stopped measurement, a full disk or a lost network share look the same from here.`,
  check: [
    'Is the instrument measuring, and is its export on?',
    'Can the drop folder be reached? `tendq status` tells.',
    'Was the file set aside? `tendq status` lists those with the reason.',
  ],
  cautions: [],
  file: null,
})
