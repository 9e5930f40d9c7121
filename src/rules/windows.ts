import { line, mean, median, type Point, sd } from '../series/statistics.ts'
import type { Occasion, ReferenceState, Window } from '../series/types.ts'
import type { Dimension } from './dimension.ts'
import { type Frame, gathering, missing, type NumberOf } from './frame.ts'
import type { Name } from './vocabulary.ts'

/** One name or one `absorbance(…)`: what the functions over history and reference work on. */
export interface Series {
  /** As it is told: `nu1`, `absorbance(575 nm)`. */
  readonly name: string
  readonly unit: string
  readonly dimension: Dimension
  readonly size: number
  readonly zero: number
  readonly measured: boolean
  /** Stored numbers, null where there is none. */
  readonly read: (window: Window, index: number) => number | null
  readonly uncertainty: (occasion: Occasion) => number | null
  readonly referenceValue: (reference: Ready) => number | null
  readonly referenceUncertainty: (reference: Ready) => number | null
}
export type Ready = Extract<ReferenceState, { kind: 'ready' }>

export const seriesOfName = (name: Name): Series => ({
  ...name,
  uncertainty: ({ u }) => u[name.name] ?? null,
  referenceValue: ({ values }) => values[name.name] ?? null,
  referenceUncertainty: ({ u }) => u[name.name] ?? null,
})

export const seriesOfAbsorbance = (nm: number, plain: Dimension): Series => ({
  name: `absorbance(${nm} nm)`,
  unit: '1',
  dimension: plain,
  size: 1,
  zero: 0,
  measured: true,
  read: (window, index) => window.occasions[index]!.absorbanceAt(nm),
  uncertainty: ({ uAbsorbanceAt }) => uAbsorbanceAt?.(nm) ?? null,
  referenceValue: ({ absorbanceAt }) => absorbanceAt(nm),
  referenceUncertainty: ({ uAbsorbanceAt }) => uAbsorbanceAt?.(nm) ?? null,
})

/** A stored number that may enter arithmetic. */
const usable = (x: number | null): x is number => x !== null && Number.isFinite(x)

export const current = (series: Series): NumberOf => {
  const what = series.name === 'gap' ? 'gap: there is no occasion before this one' : `${series.name} has no value`
  const none = series.name === 'gap' ? gathering : missing
  return (frame) => {
    const x = series.read(frame.window, frame.last)
    return usable(x) ? x * series.size + series.zero : none(frame, what)
  }
}

export const uncertaintyOf = (series: Series): NumberOf => {
  const what = `u(${series.name}) has no value`
  return (frame) => {
    const u = series.uncertainty(frame.window.occasions[frame.last]!)
    return usable(u) ? u * series.size : missing(frame, what)
  }
}

export const referenceOf = (series: Series, which: 'value' | 'u'): NumberOf => {
  const name = which === 'value' ? `reference(${series.name})` : `u_reference(${series.name})`
  const lacking = `${name}: the reference lacks it`
  return (frame) => {
    const { reference } = frame.window
    if (reference.kind === 'gathering')
      return gathering(frame, `${name}: the reference has ${reference.have} of ${reference.need} occasions`)
    if (reference.kind === 'refused') return missing(frame, `${name}: ${reference.why}`)
    const x = which === 'value' ? series.referenceValue(reference) : series.referenceUncertainty(reference)
    if (!usable(x)) return gathering(frame, lacking)
    return x * series.size + (which === 'value' ? series.zero : 0)
  }
}

export const previousOf = (series: Series): NumberOf => {
  const what = `previous(${series.name}): there is none yet`
  return (frame) => {
    for (let i = frame.last - 1; i >= 0; i--) {
      const x = series.read(frame.window, i)
      if (usable(x)) return x * series.size + series.zero
    }
    return gathering(frame, what)
  }
}

/** How far a window reaches: the newest `n` occasions that have the value, or those of a duration. */
export type Reach =
  | { readonly kind: 'occasions'; readonly n: number }
  | { readonly kind: 'duration'; readonly ms: number }

export type Statistic = 'mean' | 'median' | 'sd' | 'slope' | 'u_slope'
const LEAST: Readonly<Record<Statistic, number>> = { mean: 1, median: 1, sd: 2, slope: 2, u_slope: 3 }

export const statisticOf = (statistic: Statistic, series: Series, reach: Reach): NumberOf => {
  const least = reach.kind === 'occasions' ? reach.n : LEAST[statistic]
  const name = `${statistic}(${series.name}, …)`
  const sloping = statistic === 'slope' || statistic === 'u_slope'
  return (frame) => {
    if (reach.kind === 'duration' && !reachesBack(frame, reach.ms))
      return gathering(frame, `${name}: the history is shorter than the window`)
    const indices = newest(frame, series, reach)
    if (indices.length < least) return gathering(frame, `${name}: ${indices.length} of ${least} occasions are there`)
    if (sloping) return lineOf(frame, series, indices, statistic, name)
    const values = indices.map((i) => series.read(frame.window, i)! * series.size + series.zero)
    if (statistic === 'mean') return mean(values)
    return statistic === 'median' ? median(values) : sd(values)!
  }
}

const lineOf = (frame: Frame, series: Series, indices: readonly number[], which: 'slope' | 'u_slope', name: string) => {
  const points = indices.map((i): Point => {
    const occasion = frame.window.occasions[i]!
    const u = series.uncertainty(occasion)
    return { at: occasion.at / 1000, value: series.read(frame.window, i)!, u: usable(u) ? u : null }
  })
  const fitted = line(points)
  const x = which === 'slope' ? fitted?.slope : fitted?.uSlope
  return usable(x ?? null) ? x! * series.size : gathering(frame, `${name}: the occasions are not far enough apart`)
}

/** Indices of the occasions of a window that have the value, newest first. */
const newest = ({ window, last }: Frame, series: Series, reach: Reach): readonly number[] => {
  const found: number[] = []
  const oldest = reach.kind === 'duration' ? window.occasions[last]!.at - reach.ms : -Infinity
  const most = reach.kind === 'occasions' ? reach.n : Infinity
  for (let i = last; i >= 0 && found.length < most && window.occasions[i]!.at >= oldest; i--)
    if (usable(series.read(window, i))) found.push(i)
  return found
}

/** Whether the history covers the whole duration: otherwise two spectra of one hour would pass for a week. */
const reachesBack = ({ window, last }: Frame, ms: number): boolean =>
  window.occasions[0]!.at <= window.occasions[last]!.at - ms

export const countOf =
  (reach: Reach): NumberOf =>
  ({ window, last }) => {
    if (reach.kind === 'occasions') return Math.min(reach.n, last + 1)
    const oldest = window.occasions[last]!.at - reach.ms
    let n = 0
    while (n <= last && window.occasions[last - n]!.at >= oldest) n++
    return n
  }

export const runOf = (side: 'run_above' | 'run_below', series: Series, level: NumberOf): NumberOf => {
  const what = `${side}(${series.name}, …): no occasion has a value`
  const sign = side === 'run_above' ? 1 : -1
  return (frame) => {
    const bound = level(frame)
    if (Number.isNaN(bound)) return bound
    let run = 0
    let seen = false
    for (let i = frame.last; i >= 0; i--) {
      const x = series.read(frame.window, i)
      if (!usable(x)) continue
      seen = true
      if (sign * (x * series.size + series.zero - bound) > 0) run++
      else break
    }
    return seen ? run : missing(frame, what)
  }
}
