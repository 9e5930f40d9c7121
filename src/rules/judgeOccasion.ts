import type { Standing, Window } from '../series/types.ts'
import type { CompiledRule, Judgement } from './types.ts'

export interface JudgedRule {
  readonly rule: CompiledRule
  readonly judgement: Judgement
}

/** Rules that judge what was measured: expressions and charts. */
export const isMeasured = ({ definition: { condition } }: CompiledRule): boolean =>
  condition.kind === 'expression' || condition.kind === 'chart'

/** The always-present rules that judge each spectrum of a sample. */
export const isAlwaysOfSample = ({ definition: { condition } }: CompiledRule): boolean =>
  condition.kind === 'always' && condition.rule !== 'common-change'

/** Longest history that a chart looks back on. */
const LONGEST_LOOK_BACK = 10_000

/** Occasions that a window for these rules must hold. */
export const lookBackOf = (rules: readonly CompiledRule[]): number =>
  Math.min(LONGEST_LOOK_BACK, Math.max(1, ...rules.map((rule) => rule.lookBack)))

/**
 * What the rules of a sample say of the newest occasion of a window: first those on what was measured, then those that
 * are always there, which look at what the first could not decide.
 */
export const judgeOccasion = (
  rules: readonly CompiledRule[],
  window: Window,
  standing: Omit<Standing, 'undecided'>,
): readonly JudgedRule[] => {
  const measured = judgeAll(rules.filter(isMeasured), window)
  const undecided = measured.flatMap(({ rule, judgement: { outcome } }) =>
    outcome.kind === 'undecided' && outcome.because === 'missing' ? [rule.definition.name] : [],
  )
  return [...measured, ...judgeAll(rules.filter(isAlwaysOfSample), { ...window, standing: { ...standing, undecided } })]
}

const judgeAll = (rules: readonly CompiledRule[], window: Window): readonly JudgedRule[] =>
  rules.map((rule) => ({ rule, judgement: rule.judge(window) }))
