/** What must hold of an axis whatever the format: it runs one way, its values can be of its unit, no end stands alone. */
import type { Fault, Place } from '../fault.ts'
import type { AxisUnit } from './types.ts'

/** Values that a spectrum of d–d bands can have in each unit; a file outside is read wrongly or is another kind of spectrum. */
const RANGE: Readonly<Record<AxisUnit, readonly [number, number]>> = {
  nm: [150, 10_000],
  um: [0.15, 10],
  'cm^-1': [1000, 67_000],
  eV: [0.12, 8.3],
}

/** Whether all values can be of this unit. */
export const canBe = (x: Float64Array, unit: AxisUnit): boolean =>
  x.every((v) => v >= RANGE[unit][0] && v <= RANGE[unit][1])

/** Fewest points that make a curve. */
const FEWEST = 3

/** The first thing wrong with an axis, or null. `placeOf` says where point i stands. */
export const axisFault = (
  x: Float64Array,
  y: Float64Array,
  unit: AxisUnit,
  placeOf: (i: number) => Place,
): Fault | null => {
  if (x.length < FEWEST) {
    return {
      code: 'too-few-points',
      place: placeOf(0),
      what: `only ${x.length} points`,
      remedy: 'export the whole spectrum',
    }
  }
  const [least, most] = RANGE[unit]
  let wrong = -1
  for (let i = 0; i < x.length && wrong < 0; i++) if (x[i]! < least || x[i]! > most) wrong = i
  if (wrong >= 0) {
    const what = `${x[wrong]} cannot be a value in ${unit} (${RANGE[unit][0]} to ${RANGE[unit][1]})`
    return {
      code: 'axis-unit',
      place: placeOf(wrong),
      what,
      remedy: 'check the unit of the axis, and set it with `reading: { x: … }`',
    }
  }
  const sign = Math.sign(x.at(-1)! - x[0]!)
  for (let i = 1; i < x.length; i++) {
    const step = (x[i]! - x[i - 1]!) * sign
    if (step > 0 || (step === 0 && sign !== 0 && Object.is(y[i], y[i - 1]))) continue
    const what = `the axis turns back or stands still: ${x[i - 1]} is followed by ${x[i]}`
    return {
      code: 'axis-order',
      place: placeOf(i),
      what,
      remedy: 'look for a misprint, or for two scans one after the other',
    }
  }
  return loneEnd(x, placeOf)
}

/** A first or last point far from an otherwise regular axis: a misprint or a damaged line moves it just so. */
const loneEnd = (x: Float64Array, placeOf: (i: number) => Place): Fault | null => {
  const n = x.length
  for (const [end, next, inward] of [
    [0, 1, 1],
    [n - 1, n - 2, -1],
  ] as const) {
    const near: number[] = []
    for (let k = 0; k < 6 && next + (k + 1) * inward >= 0 && next + (k + 1) * inward < n; k++) {
      near.push(Math.abs(x[next + (k + 1) * inward]! - x[next + k * inward]!))
    }
    const step = Math.abs(x[end]! - x[next]!)
    const regular = near.length >= 2 && Math.max(...near) <= 1.5 * Math.min(...near)
    if (regular && (step > 1.9 * Math.max(...near) || step < 0.1 * Math.min(...near))) {
      const what = `${x[end]} stands ${step} away from its neighbour on an axis with steps near ${near[0]}`
      return {
        code: 'axis-jump',
        place: placeOf(end),
        what,
        remedy: 'look for a misprint or missing lines at that end',
      }
    }
  }
  return null
}

/** No step differs from the first by more than half of what would count as uneven. */
const isEven = (x: Float64Array): boolean => {
  const step = x[1]! - x[0]!
  for (let i = 2; i < x.length; i++) if (!(Math.abs(x[i]! - x[i - 1]! - step) <= 0.0025 * Math.abs(step))) return false
  return true
}

/**
 * Places where an axis jumps by nearly two of its usual steps, or where one that is otherwise even is not: points are missing or
 * misprinted there. One warning for all.
 */
export const gapWarnings = (x: Float64Array, unit: AxisUnit, placeOf: (i: number) => Place): readonly Fault[] => {
  if (isEven(x)) return []
  const steps = Float64Array.from({ length: Math.max(0, x.length - 1) }, (_, i) => Math.abs(x[i + 1]! - x[i]!))
  const usual = Float64Array.from(steps).sort()[steps.length >> 1] ?? 0
  const isUneven = (step: number) => Math.abs(step - usual) > 0.005 * usual
  const even = steps.filter((step) => !isUneven(step)).length >= Math.min(0.8 * steps.length, steps.length - 1)
  const gaps: number[] = []
  for (let i = 1; i < x.length; i++) {
    const near = Math.min(steps[i - 2] ?? Infinity, steps[i] ?? Infinity)
    if ((even && isUneven(steps[i - 1]!)) || steps[i - 1]! > 1.9 * near) gaps.push(i)
  }
  const first = gaps[0]
  if (first === undefined) return []
  const what = `the axis is uneven at ${gaps.length} place${gaps.length === 1 ? '' : 's'}, first between ${x[first - 1]} and ${x[first]} ${unit}`
  return [{ code: 'axis-gap', place: placeOf(first), what, remedy: 'check that no points are missing' }]
}

/** What the values alone admit. nm up to 1400 and cm⁻¹ from 8000 are how spectra in the visible are written; the rest is open. */
export const unitsByValue = (x: Float64Array): readonly AxisUnit[] => {
  const low = Math.min(x[0]!, x.at(-1)!)
  const high = Math.max(x[0]!, x.at(-1)!)
  if (low >= RANGE.nm[0] && high <= 1400) return ['nm']
  if (low >= 3500 && high > 10_000 && high <= RANGE['cm^-1'][1]) return ['cm^-1']
  return (['nm', 'cm^-1', 'um', 'eV'] as const).filter((unit) => low >= RANGE[unit][0] && high <= RANGE[unit][1])
}
