import { NO_SUCCESSION, type Successive, succeed, widening } from './correlation.ts'
import { CUSUM_START, type Cusum, cusumSignals, cusumStep } from './cusum.ts'
import { type Ewma, ewmaLimit, ewmaStart, ewmaStep } from './ewma.ts'
import { type Estimates, standardise, startEstimates, takeIn } from './selfStarting.ts'
import { SHEWHART_MEMORY, shewhartSignals } from './shewhart.ts'

/**
 * A control chart as a fold over the values of a series: reference values are learnt, later ones charted, and only
 * those charted without a signal are learnt from. A change therefore is not averaged into the target that shows it.
 */
export type ChartDesign =
  | { readonly chart: 'shewhart'; readonly tests: readonly string[]; readonly l: number }
  | { readonly chart: 'ewma'; readonly lambda: number; readonly l: number }
  | { readonly chart: 'cusum'; readonly k: number; readonly h: number }

export interface ChartState {
  readonly estimates: Estimates
  readonly successive: Successive
  /** Newest standardised values, as many as a Shewhart test looks back over. */
  readonly z: readonly number[]
  readonly cusum: Cusum
  readonly ewma: Ewma
  /** Outcome at the newest value charted; null while none could be. */
  readonly newest: ChartPoint | null
}

export interface ChartPoint {
  readonly signals: boolean
  readonly z: number
  /** In the unit of the value, widened where successive occasions are correlated. */
  readonly sigma: number
  readonly target: number
  /** Figures of the chart itself, in σ: `C+`, `C-`, `EWMA`, `z`, each with its limit. */
  readonly figures: readonly { readonly name: string; readonly value: number; readonly limit: number }[]
}

export const startChart = (target: Estimates['target']): ChartState => ({
  estimates: startEstimates(target),
  successive: NO_SUCCESSION,
  z: [],
  cusum: CUSUM_START,
  ewma: ewmaStart(0),
  newest: null,
})

/** A reference value: learnt, not charted. */
export const learn = (state: ChartState, x: number, u: number | null): ChartState => ({
  ...state,
  estimates: takeIn(state.estimates, x, u),
  successive: succeed(state.successive, x),
})

/** One value further; as long as no σ is known the value is learnt and nothing is charted. */
export const chartStep = (state: ChartState, design: ChartDesign, x: number, u: number | null): ChartState => {
  const standard = standardise(state.estimates, x, u)
  if (standard === null) return learn(state, x, u)
  // A single point scatters by σ however correlated; sums and averages scatter by more.
  const wider = design.chart === 'shewhart' ? 1 : widening(state.successive)
  const z = standard.z / wider
  const zs = design.chart === 'shewhart' ? [...state.z.slice(1 - SHEWHART_MEMORY), z] : state.z
  const cusum = design.chart === 'cusum' ? cusumStep(state.cusum, z, 0, design.k) : state.cusum
  const ewma = design.chart === 'ewma' ? ewmaStep(state.ewma, z, design.lambda) : state.ewma
  const { signals, figures } = look(design, zs, cusum, ewma)
  const newest = { signals, z, sigma: standard.sigma * wider, target: state.estimates.mean, figures }
  return { ...(signals ? state : learn(state, x, u)), z: zs, cusum, ewma, newest }
}

const look = (design: ChartDesign, z: readonly number[], cusum: Cusum, ewma: Ewma) => {
  switch (design.chart) {
    case 'shewhart': {
      const value = z.at(-1)!
      const outside = design.tests.length === 0 && Math.abs(value) > design.l
      return {
        signals: outside || shewhartSignals(z, design.tests).length > 0,
        figures: [{ name: 'z', value, limit: design.tests.length === 0 ? design.l : 3 }],
      }
    }
    case 'ewma': {
      const limit = ewmaLimit(ewma.i, 1, design.lambda, design.l)
      return { signals: Math.abs(ewma.z) > limit, figures: [{ name: 'EWMA', value: ewma.z, limit }] }
    }
    case 'cusum':
      return {
        signals: cusumSignals(cusum, design.h),
        figures: [
          { name: 'C+', value: cusum.high, limit: design.h },
          { name: 'C-', value: cusum.low, limit: design.h },
        ],
      }
  }
}
