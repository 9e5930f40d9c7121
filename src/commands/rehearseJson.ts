import { type Detection, type DetectionSummary, firstToRing, summariseDetections } from '../rehearsal/detection.ts'
import type { Injection } from '../rehearsal/injection.ts'
import { type Compared, compareAlarms, type RuleSummary, ratesOf, summariseRules } from '../rehearsal/summary.ts'
import { printJson } from './print.ts'
import type { Rehearsal, RuleSet } from './rehearseRun.ts'

const HOUR_MS = 3_600_000

/** `2026-03-02T09:00:00Z` */
export const sayTime = (ms: number): string => `${new Date(ms).toISOString().slice(0, 19)}Z`

const timeOrNull = (ms: number | null): string | null => (ms === null ? null : sayTime(ms))
const rounded = (value: number | null, digits: number): number | null =>
  value === null ? null : Number(value.toFixed(digits))

/** One object a would-be alarm, then what became of the injected change, then a summary. */
export const printRehearsalJson = (
  sets: readonly RuleSet[],
  injection: Injection | null,
  rehearsal: Rehearsal,
): void => {
  const [rules, against] = rehearsal.replays.map((replays) => replays.flatMap(({ alarms }) => alarms))
  for (const one of compareAlarms(rules!, against ?? [])) printJson(alarmJson(one))
  rehearsal.detections.forEach((found, k) => {
    for (const one of found) printJson(detectionJson(one, k === 0 ? 'rules' : 'against'))
  })
  for (const { sample, why } of rehearsal.skipped) printJson({ object: 'skipped', sample, why })
  printJson({
    object: 'summary',
    spectra: rehearsal.spectra,
    samples: rehearsal.samples.length,
    unclaimed_samples: rehearsal.unclaimed.length,
    instruments: rehearsal.instruments.length,
    from: timeOrNull(rehearsal.from),
    to: timeOrNull(rehearsal.to),
    injection:
      injection === null
        ? null
        : {
            ligand: injection.exchange.ligand,
            number: injection.exchange.count,
            converted: injection.part,
            course: injection.course,
            samples: rehearsal.injected.length,
            spectra: rehearsal.injected.reduce((sum, { spectra }) => sum + spectra, 0),
          },
    rules: setJson(sets, 0, injection, rehearsal),
    against: sets.length > 1 ? setJson(sets, 1, injection, rehearsal) : null,
  })
}

const alarmJson = ({ alarm, by }: Compared) => ({
  object: 'alarm',
  by,
  rule: alarm.rule,
  of: alarm.of,
  subject: alarm.subject,
  priority: alarm.priority,
  instrument: alarm.instrument,
  spectrum: alarm.spectrum,
  raised_at: sayTime(alarm.raisedAt),
  since: sayTime(alarm.since),
  cleared_at: timeOrNull(alarm.clearedAt),
})

const detectionJson = (one: Detection, by: 'rules' | 'against') => ({
  object: 'detection',
  by,
  rule: one.rule,
  sample: one.sample,
  from: sayTime(one.from),
  outcome: one.outcome,
  raised_at: timeOrNull(one.raisedAt),
  delay_occasions: one.occasions,
  delay_h: rounded(one.raisedAt === null ? null : (one.raisedAt - one.from) / HOUR_MS, 2),
  converted: rounded(one.part, 4),
})

const setJson = (sets: readonly RuleSet[], k: number, injection: Injection | null, rehearsal: Rehearsal) => {
  const { from, rules } = sets[k]!
  const lengthMs = lengthOf(rehearsal)
  const summaries = summariseRules(rules, rehearsal.replays[k]!, lengthMs)
  const alarms = summaries.reduce((sum, one) => sum + one.alarms, 0)
  const rates = ratesOf(alarms, rehearsal.spectra, lengthMs)
  const found = rehearsal.detections[k]!
  return {
    from,
    alarms,
    per_1000_spectra: rounded(rates.per1000Spectra, 3),
    per_month: rounded(rates.perMonth, 3),
    by_rule: summaries.map(ruleJson),
    detection: injection === null ? null : [firstToRing(found), ...summariseDetections(found)].map(foundJson),
  }
}

/** From the first spectrum counted to the last. */
export const lengthOf = ({ from, to }: Rehearsal): number => (from === null || to === null ? 0 : to - from)

const ruleJson = (one: RuleSummary) => ({
  rule: one.rule,
  of: one.of,
  priority: one.priority,
  rehearsed: one.rehearsed,
  spectra: one.spectra,
  occasions: one.occasions,
  gathering: one.gathering,
  undecided: one.undecided,
  alarms: one.alarms,
  per_1000_spectra: rounded(one.per1000Spectra, 3),
  per_month: rounded(one.perMonth, 3),
  run_length: rounded(one.runLength, 1),
  promised_alarms: rounded(one.promised, 3),
})

const foundJson = (one: DetectionSummary) => ({
  rule: one.rule,
  samples: one.samples,
  seen: one.seen,
  missed: one.missed,
  standing: one.standing,
  median_delay_occasions: one.occasions,
  median_delay_h: rounded(one.delayMs === null ? null : one.delayMs / HOUR_MS, 2),
  median_converted: rounded(one.part, 4),
})
