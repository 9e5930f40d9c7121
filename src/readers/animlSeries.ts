/** The curves of one AnIML SeriesSet: one independent series for the axis, and every dependent one that is an ordinate. */
import { ordinateOf } from './animlOrdinate.ts'
import { type AxisReading, axisOf, type UnitFlaw, unitOf } from './animlUnits.ts'
import { isNumberType, type NumberType, type Values, valuesOf } from './animlValues.ts'
import { childrenOf, type Element, type Flaw } from './animlXml.ts'
import type { AxisUnit, OrdinateKind, ReadingHints } from './types.ts'

export interface Curve {
  readonly x: Float64Array
  readonly y: Float64Array
  readonly xUnit: AxisUnit
  readonly yKind: OrdinateKind
  readonly name: string
  /** `individual Float64 by encoded Float32` and the like. */
  readonly forms: string
  /** Where point i stands in the text. */
  readonly offsetOf: (i: number) => number
  readonly remarks: readonly Flaw[]
}

export interface CurvesOfSet {
  readonly curves: readonly Curve[]
  readonly flaws: readonly UnitFlaw[]
  /** What was passed over, and why. */
  readonly passed: readonly Flaw[]
}

const flaw = (at: Element, code: string, what: string, remedy = 'export the file again'): Flaw => ({
  kind: 'flaw',
  code,
  offset: at.offset,
  what,
  remedy,
})

/** Reads a SeriesSet as far as it holds spectra. */
export const curvesOf = (set: Element, hints: ReadingHints): CurvesOfSet => {
  const wrong = (...flaws: UnitFlaw[]): CurvesOfSet => ({ curves: [], flaws, passed: [] })
  const series = childrenOf(set, 'Series')
  const astray = series.find(({ attributes }) => !['independent', 'dependent'].includes(attributes.dependency ?? ''))
  if (astray)
    return wrong(
      flaw(astray, 'no-dependency', `series "${astray.attributes.name ?? ''}" is neither independent nor dependent`),
    )
  const [axis, second] = series.filter(({ attributes }) => attributes.dependency === 'independent')
  if (!axis) return wrong(flaw(set, 'no-axis', 'no series of the set is independent: there is no axis'))
  if (second)
    return wrong(
      flaw(
        second,
        'two-axes',
        `"${axis.attributes.name ?? ''}" and "${second.attributes.name ?? ''}" are both independent`,
      ),
    )
  const length = lengthOf(set)
  if (length !== null && typeof length === 'object') return wrong(length)
  const unit = unitOf(axis)
  if (unit?.kind === 'flaw') return wrong(unit)
  const meaning: AxisReading =
    hints.x === undefined
      ? axisOf(axis, unit)
      : { kind: 'axis', x: hints.x, times: 1, over: 1, said: unit?.label ?? '' }
  if (meaning.kind === 'flaw') return wrong(meaning)
  if (meaning.kind === 'time')
    return {
      curves: [],
      flaws: [],
      passed: [
        flaw(set, 'not-a-spectrum', 'a course in time is no spectrum and was passed over', 'export the spectra'),
      ],
    }
  const numbers = numbersOf(axis, length)
  if (numbers.kind === 'flaw') return wrong(numbers)
  const hole = numbers.values.findIndex((v) => !Number.isFinite(v))
  if (hole >= 0)
    return wrong({
      ...flaw(axis, 'bad-number', `${numbers.values[hole]} cannot be a place on an axis`),
      offset: numbers.offsetOf(hole),
    })
  const remarks =
    length === null ? [flaw(set, 'no-length', 'the SeriesSet does not say its length; the series agree in theirs')] : []
  const other = hints.x === undefined ? null : axisOf(axis, unit)
  if (other?.kind === 'axis' && (other.x !== hints.x || other.times * other.over !== 1))
    remarks.push(
      flaw(
        axis,
        'hint-contradicts',
        `the unit is ${other.said}; ${hints.x} was taken, as the configuration says`,
        'check `reading: { x: … }`',
      ),
    )
  const x = numbers.values.map((v) => (v * meaning.times) / meaning.over)
  return dependents(
    series.filter((s) => s !== axis),
    numbers,
    x,
    meaning.x,
    length,
    remarks,
    hints,
  )
}

const lengthOf = (set: Element): number | null | Flaw => {
  const text = set.attributes.length?.trim()
  if (text === undefined) return null
  return /^\+?\d{1,9}$/.test(text) ? Number(text) : flaw(set, 'bad-length', `length="${text}" is no number of values`)
}

const numbersOf = (series: Element, length: number | null): Values | Flaw => {
  const type = series.attributes.seriesType
  if (isNumberType(type)) return valuesOf(series, type, length)
  return flaw(
    series,
    'series-type',
    `series "${series.attributes.name ?? ''}" is of type ${type ?? '(none)'}, not of numbers`,
  )
}

const dependents = (
  series: readonly Element[],
  axis: Values,
  x: Float64Array,
  xUnit: AxisUnit,
  length: number | null,
  remarks: readonly Flaw[],
  hints: ReadingHints,
): CurvesOfSet => {
  const curves: Curve[] = []
  const flaws: UnitFlaw[] = []
  const passed: Flaw[] = []
  for (const one of series) {
    const { name = '', seriesType } = one.attributes
    if (!isNumberType(seriesType)) {
      passed.push(
        flaw(
          one,
          'other-series',
          `series "${name}" holds no numbers (${seriesType ?? 'no type'}) and was passed over`,
          'nothing, if it is no spectrum',
        ),
      )
      continue
    }
    const curve = curveOf(one, seriesType, axis, x, xUnit, length, remarks, hints)
    if (curve.kind === 'flaw') flaws.push(curve)
    else if (curve.kind === 'other')
      passed.push(flaw(one, 'other-series', `${curve.what}; it was passed over`, 'nothing, if it is no spectrum'))
    else curves.push(curve.curve)
  }
  return { curves, flaws, passed }
}

const curveOf = (
  series: Element,
  type: NumberType,
  axis: Values,
  x: Float64Array,
  xUnit: AxisUnit,
  length: number | null,
  remarks: readonly Flaw[],
  hints: ReadingHints,
): UnitFlaw | { readonly kind: 'other'; readonly what: string } | { readonly kind: 'curve'; readonly curve: Curve } => {
  const name = series.attributes.name ?? ''
  const unit = unitOf(series)
  if (unit?.kind === 'flaw') return unit
  const numbers = valuesOf(series, type, length)
  if (numbers.kind === 'flaw') return numbers
  if (numbers.values.length !== x.length)
    return flaw(
      series,
      'series-length',
      `the axis has ${x.length} values, series "${name}" has ${numbers.values.length}`,
    )
  const low = numbers.values.indexOf(-Infinity)
  if (low >= 0) return { ...flaw(series, 'bad-number', '-INF cannot be measured'), offset: numbers.offsetOf(low) }
  const largest = numbers.values.reduce((most, v) => (Number.isFinite(v) ? Math.max(most, v) : most), 0)
  const kind = ordinateOf(series, unit, largest, hints)
  if (kind.kind !== 'ordinate') return kind
  return {
    kind: 'curve',
    curve: {
      x,
      y: scaledBy(numbers.values, kind.scale, kind.offset),
      xUnit,
      yKind: kind.y,
      name,
      forms: `${axis.forms.join(' and ')} by ${numbers.forms.join(' and ')} ${type}`,
      offsetOf: axis.offsetOf,
      remarks: [
        ...remarks,
        ...kind.remarks.map(([code, what]) => flaw(unit?.element ?? series, code, what, 'check `reading: { y: … }`')),
      ],
    },
  }
}

/** Divides where the scale is one over a whole number, as 0.001 is: that rounds once. */
const scaledBy = (values: Float64Array, scale: number, offset: number): Float64Array => {
  if (scale === 1 && offset === 0) return values
  const over = Math.round(1 / scale)
  return values.map((v) => (1 / over === scale ? v / over : v * scale) + offset)
}
