import type { RuleDefinition, RuleText } from '../config/types.ts'
import type { Fault } from '../fault.ts'
import type { Window } from '../series/types.ts'
import { compileChart } from './chart.ts'
import { type Compiled, compileCondition } from './compile.ts'
import { evidenceOf } from './evidence.ts'
import { frameOf, MISSING, NO, YES } from './frame.ts'
import { faultAt } from './place.ts'
import { judgeSpecies, judgeUnjudged } from './standing.ts'
import { readTree } from './tree.ts'
import type { Compilation, CompiledRule, Outcome } from './types.ts'

export { judgeOverdue, judgeOverdueSchedule } from './overdue.ts'

/**
 * Turns a rule of the configuration into a function on plain numbers, or names every fault in it at its place.
 * Pure: the text is read, never executed.
 */
export const compileRule = (definition: RuleDefinition): Compilation => {
  const { condition } = definition
  switch (condition.kind) {
    case 'expression':
      return compileExpression(definition, condition.when, condition.clear)
    case 'chart':
      return compileChart(definition, condition)
    case 'overdue':
      return standing(definition, () => ({ kind: 'undecided', because: 'gathering', what: 'judged by the clock' }))
    case 'always':
      return standing(definition, ALWAYS[condition.rule])
  }
}

const ALWAYS: Readonly<Record<'unjudged' | 'not-this-species' | 'common-change', (window: Window) => Outcome>> = {
  unjudged: judgeUnjudged,
  'not-this-species': judgeSpecies,
  'common-change': () => ({ kind: 'undecided', because: 'gathering', what: 'judged over several samples' }),
}

const standing = (definition: RuleDefinition, judge: (window: Window) => Outcome): Compilation => ({
  kind: 'compiled',
  rule: { definition, quantities: [], lookBack: 1, judge: (window) => ({ outcome: judge(window), evidence: [] }) },
})

const compileExpression = (definition: RuleDefinition, whenText: RuleText, clearText: RuleText | null): Compilation => {
  const when = compileText(whenText)
  const clear = clearText === null ? null : compileText(clearText)
  const faults = [when, clear].flatMap((one) => (one?.kind === 'refused' ? one.faults : []))
  if (when.kind === 'refused' || clear?.kind === 'refused')
    return { kind: 'refused', faults: faults as [Fault, ...Fault[]] }
  const decide = decision(when.compiled, clear?.compiled ?? null)
  const { series } = when.compiled
  const rule: CompiledRule = {
    definition,
    quantities: series.map(({ name }) => name),
    lookBack: Math.max(when.compiled.lookBack, clear?.compiled.lookBack ?? 1),
    judge: (window) => ({ outcome: decide(window), evidence: evidenceOf(series, window) }),
  }
  return { kind: 'compiled', rule }
}

const compileText = (
  text: RuleText,
):
  | { readonly kind: 'compiled'; readonly compiled: Compiled }
  | { readonly kind: 'refused'; readonly faults: readonly Fault[] } => {
  const reading = readTree(text.text)
  if (reading.kind === 'refused')
    return { kind: 'refused', faults: reading.objections.map((objection) => faultAt(text, objection)) }
  const compiling = compileCondition(reading.tree)
  if (compiling.kind === 'compiled') return compiling
  return { kind: 'refused', faults: [faultAt(text, compiling.objection)] }
}

const RINGS: Outcome = { kind: 'rings' }
const CLEARS: Outcome = { kind: 'clears' }
const HOLDS: Outcome = { kind: 'holds' }

/** `when` decides whether it rings; where it does not, `clear` whether it clears. Undecided does neither. */
const decision =
  (when: Compiled, clear: Compiled | null) =>
  (window: Window): Outcome => {
    const frame = frameOf(window)
    if (frame.last < 0) return { kind: 'undecided', because: 'gathering', what: 'there is no spectrum yet' }
    const rings = when.run(frame)
    if (rings === YES) return RINGS
    const clears = rings === NO && clear !== null ? clear.run(frame) : rings === NO ? YES : rings
    if (clears === YES) return CLEARS
    if (clears === NO) return HOLDS
    return clears === MISSING
      ? { kind: 'undecided', because: 'missing', what: frame.missing ?? '' }
      : { kind: 'undecided', because: 'gathering', what: frame.gathering ?? '' }
  }
