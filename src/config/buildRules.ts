import type { Place } from '../fault.ts'
import type { Part } from './parse.ts'
import { ALWAYS, type RuleFile } from './schemas/rules.ts'
import type { RuleDefinition, RuleText } from './types.ts'

type Always = (typeof ALWAYS)[number]

/** What the always-present rules are where the configuration says nothing. */
const DEFAULTS: Readonly<Record<Always, Pick<RuleDefinition, 'title' | 'of' | 'persist' | 'priority'>>> = {
  unjudged: { title: 'Spectra cannot be judged', of: 'sample', persist: 3, priority: 'medium' },
  'not-this-species': {
    title: 'The spectrum does not look like its compound',
    of: 'sample',
    persist: 1,
    priority: 'high',
  },
  'common-change': { title: 'Samples moved together', of: 'instrument', persist: 1, priority: 'high' },
}

/** All rules: those of the files in their order, then the always-present ones that no file adjusts. */
export const toRules = (parts: readonly Part<RuleFile>[], folder: Place): readonly RuleDefinition[] => {
  const written = parts.map(toRule)
  const missing = ALWAYS.filter((name) => !written.some((rule) => rule.name === name))
  return [...written, ...missing.map((name) => alwaysRule(name, folder))]
}

const alwaysRule = (name: Always, place: Place): RuleDefinition => ({
  name,
  ...DEFAULTS[name],
  studies: ['*'],
  latch: false,
  place,
  condition: { kind: 'always', rule: name },
})

const toRule = (part: Part<RuleFile>): RuleDefinition => {
  const { value, document, path } = part
  const always = ALWAYS.find((name) => name === value.rule)
  const defaults = always === undefined ? null : DEFAULTS[always]
  return {
    name: value.rule,
    title: value.title ?? defaults?.title ?? value.rule,
    of: value.of ?? defaults?.of ?? 'sample',
    studies: value.studies,
    persist: value.persist ?? defaults?.persist ?? 1,
    priority: value.priority ?? defaults?.priority ?? 'medium',
    latch: value.latch ?? false,
    place: document.placeOf([...path, 'rule']),
    condition: always === undefined ? conditionOf(part) : { kind: 'always', rule: always },
  }
}

const conditionOf = (part: Part<RuleFile>): RuleDefinition['condition'] => {
  const { when, clear, chart, overdue } = part.value
  const said = (text: string, ...steps: string[]): RuleText => ({
    text,
    place: part.document.placeOfText([...part.path, ...steps]),
  })
  if (when !== undefined)
    return { kind: 'expression', when: said(when, 'when'), clear: clear === undefined ? null : said(clear, 'clear') }
  if (chart !== undefined)
    return {
      kind: 'chart',
      chart: chart.kind,
      quantity: said(chart.of, 'chart', 'of'),
      k: chart.k ?? 0.5,
      h: chart.h ?? 8,
      lambda: chart.lambda ?? 0.2,
      l: chart.l ?? 3,
    }
  return { kind: 'overdue', times: overdue ?? 2 }
}
