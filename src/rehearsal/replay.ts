/**
 * Stored history judged once more, spectrum by spectrum in the order of measurement, by the same functions that judge in
 * the daemon: windows of one recipe, references as they were, `persist` in a row, an alarm a rule and subject.
 *
 * What the daemon does otherwise: a spectrum that came late was judged after those measured later, a first spectrum was
 * judged by the numbers of a provisional recipe, and what people excluded later still counted.
 */
import { ruleCovers } from '../config/lookups.ts'
import { isMeasured, judgeOccasion, lookBackOf } from '../rules/judgeOccasion.ts'
import type { CompiledRule, Outcome } from '../rules/types.ts'
import type { Window } from '../series/types.ts'
import { alarmBook } from './alarmLife.ts'
import { occasionsSoFar } from './occasionsSoFar.ts'
import { referenceAt } from './reference.ts'
import type { Replayed, ReplayRow, ReplaySample, RuleCount, Span, WouldBeAlarm } from './types.ts'

/** All rules of samples on one sample's history. */
export const replaySample = (history: ReplaySample, rules: readonly CompiledRule[], span: Span = ALL): Replayed => {
  const { study, sample, on } = history
  const own = rules.filter(({ definition }) => definition.of === 'sample' && ruleCovers(definition, study.name))
  const lookBack = lookBackOf(own.filter(isMeasured))
  const series = new Map<string, ReturnType<typeof occasionsSoFar>>()
  const book = alarmBook()
  const counts = counting(own, span)
  for (const row of history.rows) {
    const place = on[row.instrument]
    if (place === undefined) continue
    const key = `${row.instrument}\n${row.recipe}`
    const soFar = series.get(key) ?? occasionsSoFar(study.replicatesWithinMs, lookBack)
    series.set(key, soFar)
    const window: Window = {
      occasions: soFar.take(row),
      reference: referenceAt(place.reference, row.measuredAt),
      began: history.began,
      temperatureC: study.temperatureC,
      pathMm: study.pathMm,
      concentrationMolPerL: study.concentrationMolPerL,
      medium: place.medium,
    }
    for (const { rule, judgement } of judgeOccasion(own, window, { fit: row.fit, expected: history.expected })) {
      counts.take(rule, judgement.outcome, window)
      book.take({
        ...about(row, window),
        definition: rule.definition,
        of: 'sample',
        subject: sample,
        outcome: judgement.outcome,
      })
    }
  }
  return { alarms: inside(book.all(), span), counts: counts.all() }
}

export interface ReplayInstrument {
  readonly instrument: string
  readonly medium: 'air' | 'vacuum'
  /** The study that claims a sample; null when none does. */
  readonly studyOf: (sample: string) => string | null
  readonly rows: Iterable<ReplayRow>
}

/** All rules of instruments on everything that one instrument measured. It has no reference. */
export const replayInstrument = (
  { instrument, medium, studyOf, rows }: ReplayInstrument,
  rules: readonly CompiledRule[],
  span: Span = ALL,
): Replayed => {
  const own = rules.filter((rule) => rule.definition.of === 'instrument' && isMeasured(rule))
  const book = alarmBook()
  const counts = counting(own, span)
  if (own.length === 0) return { alarms: [], counts: [] }
  const soFar = occasionsSoFar(null, lookBackOf(own))
  for (const row of rows) {
    const study = studyOf(row.sample)
    if (study === null) continue
    const window: Window = { ...NO_SAMPLE, occasions: soFar.take(row), medium }
    for (const rule of own) {
      if (!ruleCovers(rule.definition, study)) continue
      const { outcome } = rule.judge(window)
      counts.take(rule, outcome, window)
      book.take({ ...about(row, window), definition: rule.definition, of: 'instrument', subject: instrument, outcome })
    }
  }
  return { alarms: inside(book.all(), span), counts: counts.all() }
}

const NO_SAMPLE = {
  reference: { kind: 'refused', why: 'an instrument has no reference, its samples have' },
  began: null,
  temperatureC: null,
  pathMm: null,
  concentrationMolPerL: null,
} as const

const about = ({ instrument, spectrum, measuredAt }: ReplayRow, { occasions }: Window) => ({
  instrument,
  spectrum,
  measuredAt,
  occasion: occasions.at(-1)?.at ?? measuredAt,
})

const ALL: Span = { since: -Infinity }

const inside = (alarms: readonly WouldBeAlarm[], { since }: Span) => alarms.filter(({ raisedAt }) => raisedAt >= since)

const counting = (rules: readonly CompiledRule[], { since }: Span) => {
  const counts = new Map(
    rules.map(({ definition: { name } }) => [
      name,
      { rule: name, spectra: 0, gathering: 0, undecided: 0, occasions: 0 },
    ]),
  )
  return {
    take: ({ definition }: CompiledRule, outcome: Outcome, { occasions }: Window): void => {
      const count = counts.get(definition.name)
      const occasion = occasions.at(-1)
      if (count === undefined || occasion === undefined || occasion.at < since) return
      count.spectra += 1
      if (outcome.kind === 'undecided') count[outcome.because === 'gathering' ? 'gathering' : 'undecided'] += 1
      else if (occasion.spectra.length === 1) count.occasions += 1
    },
    all: (): readonly RuleCount[] => [...counts.values()],
  }
}
