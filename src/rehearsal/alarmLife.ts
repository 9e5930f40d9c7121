import { conditionAfter } from '../alarms/condition.ts'
import { NORMAL_LIFE, stepAlarm } from '../alarms/index.ts'
import type { AlarmLife } from '../alarms/types.ts'
import type { RuleDefinition } from '../config/types.ts'
import type { Outcome } from '../rules/types.ts'
import type { WouldBeAlarm } from './types.ts'

/** One judgement of a rule on a subject. */
export interface Happening {
  readonly definition: RuleDefinition
  readonly of: 'sample' | 'instrument'
  readonly subject: string
  readonly instrument: string
  readonly spectrum: number
  readonly measuredAt: number
  /** Time of the occasion's first replicate. */
  readonly occasion: number
  readonly outcome: Outcome
}

/** A rule's condition on one instrument. */
interface Condition {
  /** Occasions in a row before the newest one on which the rule rang, oldest first. */
  row: readonly number[]
  newest: { readonly occasion: number; readonly rings: boolean } | null
  holds: boolean
}

interface Alarm {
  life: AlarmLife
  readonly conditions: Map<string, Condition>
  standing: WouldBeAlarm | null
}

/**
 * The alarm list in memory: takes judgements in the order of time and knows which alarms were raised and cleared. Nobody
 * acknowledges here, so an alarm that sets in again counts as another one.
 */
export const alarmBook = () => {
  const alarms = new Map<string, Alarm>()
  const past: WouldBeAlarm[] = []

  const take = (event: Happening): void => {
    const { definition, subject, instrument, occasion, outcome } = event
    if (outcome.kind === 'undecided') return
    const key = `${definition.name}\n${subject}`
    const alarm = alarms.get(key) ?? newAlarm(definition)
    alarms.set(key, alarm)
    const condition = alarm.conditions.get(instrument) ?? { row: [], newest: null, holds: false }
    alarm.conditions.set(instrument, condition)
    const row = rowWith(condition, occasion, outcome.kind === 'rings')
    condition.holds = conditionAfter(condition.holds, outcome.kind, { row: row.length, persist: definition.persist })
    const isActive = [...alarm.conditions.values()].some(({ holds }) => holds)
    if (isActive === alarm.life.active) return
    const step = stepAlarm(alarm.life, isActive ? 'rings' : 'clears', 1)
    if (step.kind === 'refused') return
    alarm.life = step.life
    if (isActive) alarm.standing = raised(event, row[0] ?? occasion)
    else if (alarm.standing !== null) {
      past.push({ ...alarm.standing, clearedAt: event.measuredAt })
      alarm.standing = null
    }
  }

  return {
    take,
    /** Every alarm, by the time it was raised. */
    all: (): readonly WouldBeAlarm[] =>
      [...past, ...[...alarms.values()].flatMap(({ standing }) => standing ?? [])].sort(
        (a, b) => a.raisedAt - b.raisedAt || a.spectrum - b.spectrum || (a.rule < b.rule ? -1 : 1),
      ),
  }
}

const newAlarm = ({ latch }: RuleDefinition): Alarm => ({
  life: { ...NORMAL_LIFE, latch },
  conditions: new Map(),
  standing: null,
})

/** The row that the newest occasion ends; replicates of one occasion count once, and the last word counts. */
const rowWith = (condition: Condition, occasion: number, rings: boolean): readonly number[] => {
  const { newest } = condition
  if (newest !== null && newest.occasion !== occasion)
    condition.row = newest.rings ? [...condition.row, newest.occasion].slice(-LONGEST_ROW) : []
  condition.newest = { occasion, rings }
  return rings ? [...condition.row, occasion] : []
}

/** How far back a row of ringing occasions is counted. */
const LONGEST_ROW = 1_000

const raised = (event: Happening, since: number): WouldBeAlarm => ({
  rule: event.definition.name,
  of: event.of,
  subject: event.subject,
  priority: event.definition.priority,
  instrument: event.instrument,
  spectrum: event.spectrum,
  raisedAt: event.measuredAt,
  since,
  clearedAt: null,
})
