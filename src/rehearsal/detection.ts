import { ruleCovers } from '../config/lookups.ts'
import type { CompiledRule } from '../rules/types.ts'
import { occasionsOf } from '../series/index.ts'
import { median } from '../series/statistics.ts'
import { type Injected, type Injection, partAt } from './injection.ts'
import type { Replayed, ReplaySample } from './types.ts'

/** How a rule met a made-up change of one sample. Times are epoch milliseconds. */
export interface Detection {
  readonly rule: string
  readonly sample: string
  readonly from: number
  /** `standing`: it rang already when the change began, and could not tell. */
  readonly outcome: 'seen' | 'missed' | 'standing'
  readonly raisedAt: number | null
  /** Occasions from the first changed one to the one that rang, both counted. */
  readonly occasions: number | null
  /** Part that was converted when it rang. */
  readonly part: number | null
}

/** Every rule of samples on one sample: what rang with the change and not without it. */
export const detections = (
  { history, from, to }: Extract<Injected, { kind: 'injected' }>,
  injection: Injection,
  rules: readonly CompiledRule[],
  without: Replayed,
  changed: Replayed,
): readonly Detection[] =>
  rules.flatMap(({ definition }): readonly Detection[] => {
    const { name, of, condition } = definition
    if (of !== 'sample' || condition.kind === 'overdue' || !ruleCovers(definition, history.study.name)) return []
    if (condition.kind === 'always' && condition.rule === 'common-change') return []
    const none = { rule: name, sample: history.sample, from, raisedAt: null, occasions: null, part: null }
    const own = without.alarms.filter(({ rule }) => rule === name)
    if (own.some(({ raisedAt, clearedAt }) => raisedAt < from && (clearedAt === null || clearedAt > from)))
      return [{ ...none, outcome: 'standing' }]
    const rang = changed.alarms.find(
      ({ rule, raisedAt, spectrum }) =>
        rule === name && raisedAt >= from && !own.some((alarm) => alarm.spectrum === spectrum),
    )
    if (rang === undefined) return [{ ...none, outcome: 'missed' }]
    const { raisedAt, instrument } = rang
    return [
      {
        ...none,
        outcome: 'seen',
        raisedAt,
        occasions: occasionsBetween(history, instrument, from, raisedAt),
        part: partAt(injection, from, to, raisedAt),
      },
    ]
  })

const occasionsBetween = ({ rows, study }: ReplaySample, instrument: string, from: number, to: number): number =>
  occasionsOf(
    rows.filter((row) => row.instrument === instrument && row.measuredAt >= from && row.measuredAt <= to),
    study.replicatesWithinMs,
  ).length

/** What many samples say of one rule, or of all rules together. */
export interface DetectionSummary {
  readonly rule: string
  readonly samples: number
  readonly seen: number
  readonly missed: number
  readonly standing: number
  /** Medians over the samples in which it was seen. */
  readonly occasions: number | null
  readonly delayMs: number | null
  readonly part: number | null
}

export const summariseDetections = (all: readonly Detection[]): readonly DetectionSummary[] =>
  [...new Set(all.map(({ rule }) => rule))].map((rule) =>
    summary(
      rule,
      all.filter((one) => one.rule === rule),
    ),
  )

/** The first of all rules to ring, sample by sample. */
export const firstToRing = (all: readonly Detection[]): DetectionSummary => {
  const samples = [...new Set(all.map(({ sample }) => sample))]
  const first = samples.map((sample) => {
    const own = all.filter((one) => one.sample === sample)
    const seen = own.filter(({ outcome }) => outcome === 'seen').sort((a, b) => a.raisedAt! - b.raisedAt!)
    return seen[0] ?? own.find(({ outcome }) => outcome === 'missed') ?? own[0]!
  })
  return summary('any rule', first)
}

const summary = (rule: string, own: readonly Detection[]): DetectionSummary => {
  const seen = own.filter(({ outcome }) => outcome === 'seen')
  const middle = (of: (one: Detection) => number): number | null => (seen.length === 0 ? null : median(seen.map(of)))
  return {
    rule,
    samples: own.length,
    seen: seen.length,
    missed: own.filter(({ outcome }) => outcome === 'missed').length,
    standing: own.filter(({ outcome }) => outcome === 'standing').length,
    occasions: middle((one) => one.occasions!),
    delayMs: middle((one) => one.raisedAt! - one.from),
    part: middle((one) => one.part!),
  }
}
