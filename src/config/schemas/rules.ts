import { z } from 'zod'
import { besideOthers, count, flag, name, number, text, troubleIssue, word } from '../pieces.ts'

/** Rules that are there whatever the configuration says. */
export const ALWAYS = ['unjudged', 'not-this-species', 'common-change'] as const

/** Which figures belong to which chart. */
const FIGURES = { shewhart: ['l'], ewma: ['lambda', 'l'], cusum: ['k', 'h'] } as const

const chart = z
  .strictObject({
    kind: word(['shewhart', 'ewma', 'cusum']),
    of: text().describe('Quantity that is charted, such as delta_o'),
    k: number({ least: 0 }).optional().describe('CUSUM: allowance, in sigma'),
    h: number({ least: 0, above: true }).optional().describe('CUSUM: decision interval, in sigma'),
    lambda: number({ least: 0, above: true, most: 1 }).optional().describe('EWMA: weight of the newest value'),
    l: number({ least: 0, above: true }).optional().describe('EWMA and Shewhart: limits, in sigma'),
  })
  .superRefine((value, context) => {
    for (const key of ['k', 'h', 'lambda', 'l'] as const) {
      const fitting: readonly string[] = FIGURES[value.kind] ?? []
      if (value[key] === undefined || fitting.length === 0 || fitting.includes(key)) continue
      const what = `${key} is no figure of a ${value.kind} chart`
      const remedy = `a ${value.kind} chart takes ${fitting.join(' and ')}`
      context.issues.push({ ...troubleIssue(value[key], { what, remedy }, [key]) })
    }
  }, besideOthers)

const CONDITIONS = ['when', 'chart', 'overdue'] as const

/** One rule of a file. */
export const ruleSchema = z
  .strictObject({
    rule: name(),
    title: text().optional().describe('What letters say has happened'),
    of: word(['sample', 'instrument', 'study']).optional(),
    studies: z.array(text()).min(1).prefault(['*']).describe('Names of studies, * and ? allowed'),
    when: text().optional().describe('Rings when this is true'),
    clear: text().optional().describe('Clears when this is true; without it, when `when` is false'),
    chart: chart.optional(),
    overdue: number({ least: 1 }).optional().describe("Times the schedule's interval"),
    persist: count(1000).optional().describe('Consecutive occasions before it rings'),
    priority: word(['low', 'medium', 'high']).optional(),
    latch: flag().optional().describe('Stays until a person resets it'),
  })
  .superRefine((value, context) => {
    const { what, remedy, key } = troubleOf(value) ?? {}
    if (what !== undefined && remedy !== undefined)
      context.issues.push({ ...troubleIssue(value, { what, remedy }, key === undefined ? [] : [key]) })
  }, besideOthers)

type Written = Readonly<Record<'rule' | 'of' | 'when' | 'clear' | 'chart' | 'overdue', unknown>>

const troubleOf = (value: Partial<Written>): { what: string; remedy: string; key?: string } | null => {
  const given = CONDITIONS.filter((key) => value[key] !== undefined)
  const always = (ALWAYS as readonly unknown[]).includes(value.rule)
  if (always) {
    const key = [...given, ...(value.clear === undefined ? [] : ['clear'])][0]
    if (key === undefined) return null
    return {
      key,
      what: `the rule ${value.rule} is always there and has its condition built in`,
      remedy: 'set only title, studies, persist, priority and latch, or give a rule of your own another name',
    }
  }
  if (given.length === 0) return { what: 'the rule has no condition', remedy: `write one of ${CONDITIONS.join(', ')}` }
  if (given.length > 1)
    return { key: given[1]!, what: `${given.join(' and ')} exclude each other`, remedy: 'make two rules of it' }
  if (value.clear !== undefined && value.when === undefined)
    return { key: 'clear', what: 'clear belongs to a rule with when', remedy: 'delete it: the rule clears by itself' }
  if (value.of === 'study')
    return { key: 'of', what: 'only common-change is judged of a study', remedy: 'write sample or instrument' }
  return null
}

/** `rules/*.yaml` */
export const rulesSchema = z.strictObject({ rules: z.array(ruleSchema).min(1) })

export type RuleFile = z.output<typeof ruleSchema>
