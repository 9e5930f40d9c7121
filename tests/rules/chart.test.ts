import { describe, expect, it } from 'vitest'
import type { RuleDefinition } from '../../src/config/types.ts'
import { compileRule } from '../../src/rules/index.ts'
import type { Window } from '../../src/series/types.ts'
import { BEGAN, definition, HOUR, occasion, reference } from './fixtures.ts'

type Chart = Extract<RuleDefinition['condition'], { kind: 'chart' }>
const chart = (more: Partial<Chart> = {}) =>
  compileRule({
    ...definition(''),
    condition: {
      kind: 'chart',
      chart: 'cusum',
      quantity: { text: 'delta_o', place: { at: 'rules/trial.yaml', line: 9, column: 30 } },
      ...{ k: 0.5, h: 5, lambda: 0.1, l: 3 },
      ...more,
    },
  })
const judge = (window: Window, more: Partial<Chart> = {}) => {
  const compilation = chart(more)
  if (compilation.kind === 'refused') throw new Error(compilation.faults[0].what)
  return compilation.rule.judge(window)
}

/** Five reference occasions about 19530 with u 4, then what follows, six hours apart. */
const STEADY = [19530, 19534, 19526, 19532, 19528]
const after = (values: readonly (number | null)[], state?: Window['reference']): Window => {
  const all = [...STEADY, ...values]
  return {
    occasions: all.map((delta_o, i) => occasion(BEGAN + i * 6 * HOUR, { delta_o }, { delta_o: 4 })),
    reference: state ?? reference({ delta_o: 19530 }, { delta_o: 1.8 }, BEGAN + 24 * HOUR),
    ...{ began: BEGAN, temperatureC: 25, pathMm: 10, concentrationMolPerL: null, medium: 'air' as const },
  }
}

describe('a chart', () => {
  it.each(['cusum', 'ewma', 'shewhart'] as const)(
    '%s rings for a sample that left its reference and not for a steady one',
    (kind) => {
      expect(judge(after([19531, 19527, 19533, 19529]), { chart: kind }).outcome.kind).toBe('clears')
      expect(judge(after([19560, 19562, 19561, 19563]), { chart: kind }).outcome.kind).toBe('rings')
    },
  )
  it('clears when it is back inside its limits', () => {
    const away = [19560, 19562]
    expect(judge(after(away), { chart: 'shewhart' }).outcome.kind).toBe('rings')
    expect(judge(after([...away, 19531]), { chart: 'shewhart' }).outcome.kind).toBe('clears')
  })
  it('keeps ringing for a change that stays: what rang is not learnt from', () => {
    expect(judge(after(Array.from({ length: 300 }, () => 19570))).outcome.kind).toBe('rings')
  })
  it('finds a drift of a quarter σ an occasion that no single point shows', () => {
    const drifting = Array.from({ length: 12 }, (_, i) => 19530 + i)
    expect(judge(after(drifting)).outcome.kind).toBe('rings')
    expect(judge(after(drifting), { chart: 'shewhart' }).outcome.kind).toBe('clears')
  })
  it('compares with typed values, or with the reference of another sample, as they are', () => {
    const typed = reference({ delta_o: 19500 }, { delta_o: 2 }, null)
    expect(judge(after([], typed)).outcome.kind).toBe('rings')
    expect(judge(after([], reference({ delta_o: 19530 }, { delta_o: 2 }, null))).outcome.kind).toBe('clears')
    const elsewhere = reference({ delta_o: 19500 }, { delta_o: 2 }, BEGAN - 1)
    expect(judge(after([], elsewhere)).outcome.kind).toBe('rings')
  })
  it('is gathering during the reference, and missing without the value', () => {
    const because = (window: Window) => {
      const { outcome } = judge(window)
      return outcome.kind === 'undecided' ? outcome.because : outcome.kind
    }
    expect(because(after([]))).toBe('gathering')
    expect(because(after([1], { kind: 'gathering', have: 1, need: 5 }))).toBe('gathering')
    expect(because(after([1], { kind: 'refused', why: 'slope' }))).toBe('missing')
    expect(because(after([null]))).toBe('missing')
    expect(because(after([19530, null, 19531]))).toBe('clears')
  })
  it('tells its own figures beside the quantity', () => {
    const { evidence } = judge(after([19560, 19562]))
    expect(evidence[0]).toMatchObject({ name: 'delta_o', value: 19562, u: 4, reference: 19530 })
    expect(evidence.map(({ name }) => name)).toEqual(['delta_o', 'C+ (limit 5)', 'C- (limit 5)'])
  })
  it('takes Western Electric and Nelson tests by name', () => {
    const low = [19527, 19526, 19527, 19526, 19527, 19526, 19527, 19526]
    const tests = ['western-electric-1', 'western-electric-4']
    expect(judge(after(low), { chart: 'shewhart', tests }).outcome.kind).toBe('rings')
    expect(judge(after(low), { chart: 'shewhart', tests: ['nelson-1'] }).outcome.kind).toBe('clears')
  })
  it.each<[Partial<Chart>, string]>([
    [{ quantity: { text: 'delta', place: { at: 'r.yaml', line: 1, column: 1 } } }, 'did you mean delta_o?'],
    [
      { quantity: { text: 'nu1 + nu2', place: { at: 'r.yaml', line: 1, column: 1 } } },
      'name one quantity, such as nu1',
    ],
    [
      { quantity: { text: 'age', place: { at: 'r.yaml', line: 1, column: 1 } } },
      'name a measured quantity, such as delta_o',
    ],
    [{ chart: 'shewhart', tests: ['nelson-9'] }, 'did you mean nelson-1?'],
  ])('is refused for what cannot be charted: %j', (more, remedy) => {
    const compilation = chart(more)
    expect(compilation.kind === 'refused' && compilation.faults[0].remedy).toBe(remedy)
  })
})
