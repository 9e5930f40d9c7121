import type { RuleDefinition } from '../config/types.ts'
import { type ChartDesign, type ChartState, chartStep, learn, startChart } from '../series/chart.ts'
import { SHEWHART_TESTS } from '../series/shewhart.ts'
import type { ReferenceState, Window } from '../series/types.ts'
import { seriesOf } from './compile.ts'
import { evidenceOf } from './evidence.ts'
import { faultAt } from './place.ts'
import { suggestion } from './suggest.ts'
import { readTree } from './tree.ts'
import type { Compilation, Evidence, Judgement, Outcome } from './types.ts'
import type { Series } from './windows.ts'

type Condition = Extract<RuleDefinition['condition'], { kind: 'chart' }>

/** A control chart of one quantity: rings outside its limits, clears inside. */
export const compileChart = (definition: RuleDefinition, condition: Condition): Compilation => {
  const { quantity } = condition
  const reading = readTree(quantity.text)
  if (reading.kind === 'refused') {
    const [first, ...others] = reading.objections
    return { kind: 'refused', faults: [faultAt(quantity, first), ...others.map((one) => faultAt(quantity, one))] }
  }
  const series = seriesOf(reading.tree)
  if ('code' in series) return { kind: 'refused', faults: [faultAt(quantity, series)] }
  if (!series.measured)
    return refused(
      quantity.place,
      'rule-arguments',
      `no chart is drawn of ${series.name}`,
      'name a measured quantity, such as delta_o',
    )
  const unknown = condition.tests?.find((name) => !SHEWHART_TESTS.has(name))
  if (unknown !== undefined) {
    const meant = suggestion(unknown, [...SHEWHART_TESTS.keys()])
    const remedy = meant === null ? 'name western-electric-1 to -4 or nelson-1 to -8' : `did you mean ${meant}?`
    return refused(definition.place, 'rule-unknown-test', `unknown test ${unknown} of a Shewhart chart`, remedy)
  }
  const design = designOf(condition)
  return {
    kind: 'compiled',
    rule: {
      definition,
      quantities: [series.name],
      lookBack: Infinity,
      judge: (window) => judge(design, series, window),
    },
  }
}

const refused = (place: RuleDefinition['place'], code: string, what: string, remedy: string): Compilation => ({
  kind: 'refused',
  faults: [{ code, place, what, remedy }],
})

/** The chart that a rule draws. */
export const designOf = ({ chart, k, h, lambda, l, tests }: Condition): ChartDesign => {
  switch (chart) {
    case 'shewhart':
      return { chart, l, tests: tests ?? [] }
    case 'ewma':
      return { chart, lambda, l }
    case 'cusum':
      return { chart, k, h }
  }
}

const judge = (design: ChartDesign, series: Series, window: Window): Judgement => {
  const evidence = evidenceOf([series], window)
  const undecided = (because: 'gathering' | 'missing', what: string): Judgement => ({
    outcome: { kind: 'undecided', because, what },
    evidence,
  })
  const { reference } = window
  const last = window.occasions.length - 1
  if (last < 0) return undecided('gathering', 'there is no spectrum yet')
  if (series.read(window, last) === null) return undecided('missing', `${series.name} has no value`)
  if (reference.kind === 'gathering')
    return undecided('gathering', `the reference has ${reference.have} of ${reference.need} occasions`)
  if (reference.kind === 'refused') return undecided('missing', reference.why)
  if (reference.until !== null && window.occasions[last]!.at <= reference.until)
    return undecided('gathering', 'the occasion belongs to the reference')
  const state = chartOf(design, series, window, reference)
  if (state === null) return undecided('gathering', `the reference lacks ${series.name}`)
  if (state.newest === null) return undecided('gathering', 'too few values to know their scatter')
  const outcome: Outcome = state.newest.signals ? { kind: 'rings' } : { kind: 'clears' }
  return { outcome, evidence: [...evidence, ...figuresOf(state)] }
}

type Ready = Extract<ReferenceState, { kind: 'ready' }>

/** Own reference occasions are learnt from; a target that was typed in or belongs to another sample is taken as it is. */
const chartOf = (design: ChartDesign, series: Series, window: Window, reference: Ready): ChartState | null => {
  const { occasions } = window
  const until = reference.until
  const firstAfter = until === null ? 0 : occasions.findIndex(({ at }) => at > until)
  const own = occasions.slice(0, firstAfter).filter((_, i) => series.read(window, i) !== null).length
  const value = series.referenceValue(reference)
  if (own < 2 && value === null) return null
  let state = startChart(own >= 2 ? null : { value: value!, u: series.referenceUncertainty(reference) ?? 0 })
  for (let i = own >= 2 ? 0 : firstAfter; i < occasions.length; i++) {
    const x = series.read(window, i)
    if (x === null || !Number.isFinite(x)) continue
    const u = series.uncertainty(occasions[i]!)
    state = i < firstAfter ? learn(state, x, u) : chartStep(state, design, x, u)
  }
  return state
}

const figuresOf = ({ newest }: ChartState): readonly Evidence[] =>
  (newest?.figures ?? []).map(({ name, value, limit }) => ({
    name: `${name} (limit ${Number(limit.toPrecision(3))})`,
    unit: '1',
    value,
    u: null,
    reference: null,
    uReference: null,
  }))
