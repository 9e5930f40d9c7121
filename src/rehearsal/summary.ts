import type { RuleDefinition } from '../config/types.ts'
import { designOf } from '../rules/chart.ts'
import type { CompiledRule } from '../rules/types.ts'
import { averageRunLength } from '../series/runLength.ts'
import type { Replayed, RuleCount, WouldBeAlarm } from './types.ts'

export interface RuleSummary extends RuleCount {
  readonly of: RuleDefinition['of']
  readonly priority: RuleDefinition['priority']
  /** False for what no stored spectrum can tell: rules on the clock, and what is common to samples. */
  readonly rehearsed: boolean
  readonly alarms: number
  readonly per1000Spectra: number | null
  /** Null for less than a day of history. */
  readonly perMonth: number | null
  /** Of a chart: occasions between false alarms that its design promises. */
  readonly runLength: number | null
  /** Of a chart: false alarms that its design promises on this many occasions. */
  readonly promised: number | null
}

const MONTH_MS = (365.25 / 12) * 86_400_000
const DAY_MS = 86_400_000

/** A rule at a time over all that was replayed; `lengthMs` from the first spectrum counted to the last. */
export const summariseRules = (
  rules: readonly CompiledRule[],
  replays: readonly Replayed[],
  lengthMs: number,
): readonly RuleSummary[] => {
  const alarms = replays.flatMap((one) => one.alarms)
  const counts = replays.flatMap((one) => one.counts)
  return rules.map(({ definition }) => {
    const count = total(definition.name, counts)
    const raised = alarms.filter(({ rule }) => rule === definition.name).length
    const runLength = runLengthOf(definition)
    return {
      ...count,
      of: definition.of,
      priority: definition.priority,
      rehearsed: isRehearsed(definition),
      alarms: raised,
      ...ratesOf(raised, count.spectra, lengthMs),
      runLength,
      promised: runLength === null ? null : count.occasions / runLength,
    }
  })
}

/** Alarms per 1,000 spectra and per month (365.25/12 days). */
export const ratesOf = (alarms: number, spectra: number, lengthMs: number) => ({
  per1000Spectra: spectra === 0 ? null : (1000 * alarms) / spectra,
  perMonth: lengthMs < DAY_MS ? null : (alarms * MONTH_MS) / lengthMs,
})

const isRehearsed = ({ condition, of }: RuleDefinition): boolean =>
  of !== 'study' &&
  (condition.kind === 'expression' ||
    condition.kind === 'chart' ||
    (condition.kind === 'always' && condition.rule !== 'common-change'))

const runLengthOf = ({ condition }: RuleDefinition): number | null =>
  condition.kind === 'chart' ? averageRunLength(designOf(condition)) : null

const total = (rule: string, counts: readonly RuleCount[]): RuleCount =>
  counts
    .filter((count) => count.rule === rule)
    .reduce(
      (sum, count) => ({
        rule,
        spectra: sum.spectra + count.spectra,
        gathering: sum.gathering + count.gathering,
        undecided: sum.undecided + count.undecided,
        occasions: sum.occasions + count.occasions,
      }),
      { rule, spectra: 0, gathering: 0, undecided: 0, occasions: 0 },
    )

/** An alarm of one or both of two rule sets: the same rule rang for the same subject at the same spectrum. */
export interface Compared {
  readonly alarm: WouldBeAlarm
  readonly by: 'both' | 'rules' | 'against'
}

/** The alarms of two rule sets side by side, in the order of time. */
export const compareAlarms = (
  rules: readonly WouldBeAlarm[],
  against: readonly WouldBeAlarm[],
): readonly Compared[] => {
  const key = ({ rule, subject, spectrum }: WouldBeAlarm): string => `${rule}\n${subject}\n${spectrum}`
  const [inRules, inAgainst] = [new Set(rules.map(key)), new Set(against.map(key))]
  return [
    ...rules.map((alarm): Compared => ({ alarm, by: inAgainst.has(key(alarm)) ? 'both' : 'rules' })),
    ...against.filter((alarm) => !inRules.has(key(alarm))).map((alarm): Compared => ({ alarm, by: 'against' })),
  ].sort((a, b) => a.alarm.raisedAt - b.alarm.raisedAt)
}
