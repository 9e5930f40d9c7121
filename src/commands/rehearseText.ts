import { type DetectionSummary, firstToRing, summariseDetections } from '../rehearsal/detection.ts'
import type { Injection } from '../rehearsal/injection.ts'
import { type Compared, compareAlarms, type RuleSummary, ratesOf, summariseRules } from '../rehearsal/summary.ts'
import { printLine } from './print.ts'
import { printable } from './printable.ts'
import { lengthOf, sayTime } from './rehearseJson.ts'
import type { Rehearsal, RuleSet } from './rehearseRun.ts'

const DAY_MS = 86_400_000
const NONE = '–'

/** What was rehearsed, each rule with how often it would have rung, the alarms, and how soon a made-up change was seen. */
export const printRehearsal = (sets: readonly RuleSet[], injection: Injection | null, rehearsal: Rehearsal): void => {
  printLine(scope(rehearsal))
  if (rehearsal.unclaimed.length > 0)
    printLine(`no study claims ${rehearsal.unclaimed.map(printable).join(', ')}: no rule judges such a sample`)
  printSets(sets, rehearsal)
  const [rules, against] = rehearsal.replays.map((replays) => replays.flatMap(({ alarms }) => alarms))
  const compared = compareAlarms(rules!, against ?? [])
  if (compared.length > 0) {
    printLine('')
    printTable(...alarmTable(compared, sets.length > 1))
  }
  if (injection !== null) printInjection(sets, injection, rehearsal)
}

const scope = (rehearsal: Rehearsal): string => {
  const { spectra, samples, instruments, from, to } = rehearsal
  const what = `${count(spectra, 'spectrum', 'spectra')} of ${count(samples.length, 'sample')} on ${count(instruments.length, 'instrument')}`
  if (from === null || to === null) return `${what}: nothing to rehearse on`
  return `${what}, ${sayTime(from)} to ${sayTime(to)} (${(lengthOf(rehearsal) / DAY_MS).toFixed(1)} days)`
}

const count = (n: number, one: string, many = `${one}s`): string => `${n} ${n === 1 ? one : many}`
const figure = (value: number | null, digits: number): string => (value === null ? NONE : value.toFixed(digits))

type Cell = string
type Table = readonly [heads: readonly Cell[], rows: readonly (readonly Cell[])[]]

/** Columns as wide as their widest cell; all but those of words are set to the right. */
const printTable = (heads: readonly Cell[], rows: readonly (readonly Cell[])[]): void => {
  const widths = heads.map((head, i) => Math.max(head.length, ...rows.map((row) => row[i]!.length)))
  const isWords = heads.map((_, i) => rows.some((row) => /[a-z]/i.test(row[i]!)))
  for (const row of [heads, ...rows])
    printLine(
      row
        .map((cell, i) => (isWords[i] ? cell.padEnd(widths[i]!) : cell.padStart(widths[i]!)))
        .join('  ')
        .trimEnd(),
    )
}

const printSets = (sets: readonly RuleSet[], rehearsal: Rehearsal): void => {
  const lengthMs = lengthOf(rehearsal)
  const summaries = sets.map(({ rules }, k) => summariseRules(rules, rehearsal.replays[k]!, lengthMs))
  sets.forEach(({ from }, k) => {
    const all = summaries[k]!
    const alarms = all.reduce((sum, one) => sum + one.alarms, 0)
    const { per1000Spectra, perMonth } = ratesOf(alarms, rehearsal.spectra, lengthMs)
    const rate = `${figure(per1000Spectra, 2)} per 1,000 spectra, ${figure(perMonth, 2)} per month`
    printLine(`\nrules of ${from}: ${count(alarms, 'alarm')}, ${rate}`)
    printTable(...ruleTable(all.filter(({ rehearsed }) => rehearsed)))
    const others = all.filter(({ rehearsed }) => !rehearsed).map(({ rule }) => rule)
    if (others.length > 0) printLine(`not rehearsed, since no single spectrum decides them: ${others.join(', ')}`)
  })
  if (summaries.some((all) => all.some(({ runLength }) => runLength !== null)))
    printLine(
      'run length: occasions between false alarms that the chart is designed for; promised: so many on these occasions',
    )
}

const ruleTable = (rules: readonly RuleSummary[]): Table => [
  ['rule', 'alarms', '/1,000', '/month', 'occasions', 'gathering', 'undecided', 'run length', 'promised'],
  rules.map((one) => [
    one.rule,
    String(one.alarms),
    figure(one.per1000Spectra, 2),
    figure(one.perMonth, 2),
    String(one.occasions),
    String(one.gathering),
    String(one.undecided),
    figure(one.runLength, 0),
    figure(one.promised, 2),
  ]),
]

const BY = { both: 'both', rules: 'first', against: 'second' } as const

const alarmTable = (compared: readonly Compared[], two: boolean): Table => [
  ['raised', 'cleared', 'rule', 'of', 'on', 'spectrum', ...(two ? ['rules'] : [])],
  compared.map(({ alarm, by }) => [
    sayTime(alarm.raisedAt),
    alarm.clearedAt === null ? NONE : sayTime(alarm.clearedAt),
    alarm.rule,
    printable(alarm.subject),
    printable(alarm.instrument),
    String(alarm.spectrum),
    ...(two ? [BY[by]] : []),
  ]),
]

const printInjection = (sets: readonly RuleSet[], injection: Injection, rehearsal: Rehearsal): void => {
  const { injected, skipped } = rehearsal
  const { exchange, part, course } = injection
  const spectra = injected.reduce((sum, one) => sum + one.spectra, 0)
  const grows =
    course === 'step' ? 'from the middle of each history on' : 'growing from the middle of each history to its end'
  printLine(
    `\nmade-up change: ${exchange.count} ${exchange.ligand} in place of what leaves, ${figure(100 * part, 1)} % converted, ${grows}`,
  )
  printLine(
    `into ${count(spectra, 'spectrum', 'spectra')} of ${count(injected.length, 'sample')}, each fitted again; products: ${[...new Set(injected.map(({ product }) => product))].join('; ')}`,
  )
  for (const { sample, why } of skipped) printLine(`not into ${printable(sample)}: ${why}`)
  sets.forEach(({ from, rules }, k) => {
    const found = rehearsal.detections[k]!
    printLine(`\nrules of ${from}; delays and parts converted are medians, false alarms those without the change`)
    const quiet = summariseRules(rules, rehearsal.replays[k]!, lengthOf(rehearsal))
    printTable(...detectionTable([firstToRing(found), ...summariseDetections(found)], quiet))
  })
}

const detectionTable = (rules: readonly DetectionSummary[], quiet: readonly RuleSummary[]): Table => [
  ['rule', 'seen', 'missed', 'rang before', 'occasions', 'days', '% converted', 'false/1,000'],
  rules.map((one) => [
    one.rule,
    `${one.seen}/${one.samples}`,
    String(one.missed),
    String(one.standing),
    figure(one.occasions, 0),
    figure(one.delayMs === null ? null : one.delayMs / DAY_MS, 1),
    figure(one.part === null ? null : 100 * one.part, 2),
    figure(quiet.find(({ rule }) => rule === one.rule)?.per1000Spectra ?? null, 2),
  ]),
]
