import { DateTime } from 'luxon'
import { cautionsFor } from '../chemistry/cautions.ts'
import { type BandState, interpretChange } from '../chemistry/meaning.ts'
import type { RuleDefinition } from '../config/types.ts'
import { labelOf, sayChange } from '../mail/figures.ts'
import type { AlarmFacts } from '../mail/types.ts'
import type { Evidence } from '../rules/types.ts'
import type { Occasion, ReferenceState } from '../series/types.ts'
import type { Judged } from './alarm.ts'
import type { Stations } from './pipeline.ts'

/** The facts of an alarm before it has a number and an event. */
export type UntoldFacts = Omit<AlarmFacts, 'alarm' | 'event'>

/** The alarm in one line: what moved and by how much. */
export const messageOf = ({ ruleTitle, evidence }: UntoldFacts): string => {
  const moved = evidence.find((one) => sayChange(one) !== null)
  return moved === undefined ? ruleTitle : `${ruleTitle}: ${labelOf(moved.name)} ${sayChange(moved)}`
}

/** The rule's condition as its author wrote it, or the chart in words. */
export const ruleText = ({ condition }: RuleDefinition): string => {
  switch (condition.kind) {
    case 'expression':
      return condition.when.text
    case 'chart':
      return `${condition.chart} chart of ${condition.quantity.text} is outside its limits`
    case 'overdue':
      return `nothing arrived for ${condition.times} times the interval of the schedule`
    case 'always':
      return WORDS[condition.rule]
  }
}

const WORDS = {
  unjudged: 'a spectrum could not be fitted, or a rule could not decide',
  'not-this-species': 'the spectrum does not look like its species',
  'common-change':
    'samples moved by the same amount: more than the instrument may, or two of their own alarms ring for it',
} as const

/** What a letter says. `row`: times of the occasions on which the rule rang in a row, newest first. */
export const factsOf = (judged: Judged, row: readonly number[], { room }: Stations): UntoldFacts => {
  const { config } = room()
  const { rule, judgement, kept, about } = judged
  const { subject, identity, arrival } = kept
  const { name, title, priority } = rule.definition
  const inZone = (ms: number): string =>
    DateTime.fromMillis(ms, { zone: config.timeZone }).toISO({ suppressMilliseconds: true }) ??
    new Date(ms).toISOString()
  return {
    kind: 'alarm',
    room: config.room,
    rule: name,
    ruleTitle: title,
    ruleText: ruleText(rule.definition),
    priority,
    of: about.of,
    subject: about.subject,
    instrument: subject.instrument.name,
    measuredAt: inZone(identity.measuredAt),
    since: row.length === 0 ? null : inZone(row.at(-1)!),
    spectra: row.length,
    evidence: judgement.evidence,
    file: arrival.file,
    ...(about.of === 'sample' ? sampleStory(judged) : instrumentStory(judged)),
  }
}

type Story = Pick<
  UntoldFacts,
  'study' | 'species' | 'speciesTitle' | 'parameters' | 'diagnosis' | 'confidence' | 'meaning' | 'check' | 'cautions'
>

const sampleStory = ({ kept: { subject }, window }: Judged): Story => {
  const now = window.occasions.at(-1)
  const read = interpretChange({
    species: subject.species,
    before: bandsOf(window.reference.kind === 'ready' ? window.reference : null),
    now: bandsOf(now ?? null),
  })
  return {
    study: subject.study.name,
    species: subject.species.name,
    speciesTitle: subject.species.title,
    parameters: PARAMETERS.map(({ name, unit }) => parameter(name, unit, now, window.reference)),
    diagnosis: read.diagnosis,
    confidence: read.confidence,
    meaning: read.meaning,
    check: read.check,
    cautions: cautionsFor(subject.species, read.diagnosis),
  }
}

const instrumentStory = ({ kept: { subject } }: Judged): Story => ({
  study: null,
  species: null,
  speciesTitle: null,
  parameters: [],
  diagnosis: 'unclear',
  confidence: null,
  meaning: `The rule is about the instrument, not about one sample; the newest spectrum was of ${subject.sample}.`,
  check: [
    'Measure the blank again, with a clean cell.',
    'Measure a check standard, and compare with its certificate.',
    'How old is the lamp?',
  ],
  cautions: [],
})

const PARAMETERS = [
  { name: 'delta_o', unit: 'cm^-1' },
  { name: 'b', unit: 'cm^-1' },
] as const

type Values = Pick<Occasion, 'values' | 'u'>

const parameter = (name: string, unit: string, now: Values | undefined, reference: ReferenceState): Evidence => ({
  name,
  unit,
  value: now?.values[name] ?? null,
  u: now?.u[name] ?? null,
  reference: reference.kind === 'ready' ? (reference.values[name] ?? null) : null,
  uReference: reference.kind === 'ready' ? (reference.u[name] ?? null) : null,
})

const bandsOf = (from: Values | null): Readonly<Record<string, BandState>> => {
  if (from === null) return {}
  const roles = ['nu1', 'nu2', 'nu3', 'nu4', 'nu5', 'nu6'].filter((role) => (from.values[role] ?? null) !== null)
  return Object.fromEntries(
    roles.map((role) => {
      const height = role.replace('nu', 'height')
      return [
        role,
        {
          positionPerCm: from.values[role]!,
          uPositionPerCm: from.u[role] ?? null,
          height: from.values[height] ?? null,
          uHeight: from.u[height] ?? null,
        },
      ]
    }),
  )
}
