import { suggestion } from '../rules/suggest.ts'
import { NAMES } from '../rules/vocabulary.ts'
import { halfWidthPerCm, positionPerCm } from './positions.ts'
import { type Dimension, parseQuantity } from './quantity.ts'

export type Read<T> =
  | { readonly kind: 'read'; readonly value: T }
  | { readonly kind: 'refused'; readonly what: string; readonly remedy: string }

/** Names of quantities that a criterion or a typed reference can be given for. */
const CRITERIA = [...NAMES.values()].filter(({ measured }) => measured)

/** Null where the rule language knows the quantity and it has a value of its own; else what is wrong. */
export const faultOfQuantity = (name: string): { readonly what: string; readonly remedy: string } | null => {
  const names = CRITERIA.map((one) => one.name)
  if (names.includes(name)) return null
  const near = suggestion(name, names)
  return {
    what: `"${name}" is no quantity that can be judged`,
    remedy: near === null ? `the quantities are ${names.join(', ')}` : `did you mean ${near}?`,
  }
}

/** Positions may be written as wavelengths; widths and parameters of the field may not, for these do not convert alone. */
const isPosition = (name: string): boolean => /^(nu|max)\d$/.test(name)

const DIMENSIONS: Readonly<Record<string, Dimension>> = {
  'cm^-1': 'wavenumber',
  degC: 'temperature',
  mm: 'length',
  'mol/L': 'concentration',
  '1': 'number',
}

const dimensionOf = (name: string): Dimension =>
  isPosition(name) ? 'spectral' : (DIMENSIONS[NAMES.get(name)?.unit ?? '1'] ?? 'number')

type Unit = 'nm' | 'cm^-1'

/** One bound in the quantity's own unit; wavelengths become vacuum wavenumbers. */
const readBound = (name: string, text: string): Read<number> => {
  const reading = parseQuantity(text, dimensionOf(name))
  if (reading.kind === 'refused') return reading
  if (!isPosition(name)) return { kind: 'read', value: reading.value }
  if (reading.value <= 0)
    return { kind: 'refused', what: `"${text}" is too small`, remedy: 'it must be more than zero' }
  return { kind: 'read', value: positionPerCm({ value: reading.value, unit: reading.unit as Unit }) }
}

/** Two bounds, ascending in the quantity's own unit whichever way they were written. */
export const readRange = (name: string, [a, b]: readonly [string, string]): Read<readonly [number, number]> => {
  const first = readBound(name, a)
  if (first.kind === 'refused') return first
  const second = readBound(name, b)
  if (second.kind === 'refused') return second
  if (first.value === second.value)
    return { kind: 'refused', what: `${a} and ${b} leave no room`, remedy: 'widen the range' }
  const [low, high] = [Math.min(first.value, second.value), Math.max(first.value, second.value)]
  return { kind: 'read', value: [low, high] }
}

/** A value and its standard uncertainty, in the quantity's own unit. */
export const readValue = (
  name: string,
  [written, uncertainty]: readonly [string, string],
): Read<readonly [number, number]> => {
  const value = readBound(name, written)
  if (value.kind === 'refused') return value
  const u = readUncertainty(name, written, uncertainty)
  if (u.kind === 'refused') return u
  if (u.value <= 0)
    return { kind: 'refused', what: `the uncertainty ${uncertainty} is too small`, remedy: 'it must be more than zero' }
  return { kind: 'read', value: [value.value, u.value] }
}

const readUncertainty = (name: string, written: string, text: string): Read<number> => {
  const dimension = dimensionOf(name)
  const reading = parseQuantity(text, dimension)
  if (reading.kind === 'refused') return reading
  if (dimension === 'temperature' && /K$/.test(text)) return parseQuantity(text.replace(/K$/, 'degC'), dimension)
  if (dimension !== 'spectral' || reading.value <= 0) return { kind: 'read', value: reading.value }
  const centre = parseQuantity(written, 'spectral')
  if (centre.kind === 'refused') return centre
  const half = halfWidthPerCm(
    { value: centre.value, unit: centre.unit as Unit },
    { value: reading.value, unit: reading.unit as Unit },
  )
  return half === null
    ? { kind: 'refused', what: `the uncertainty ${text} exceeds the value`, remedy: 'write the standard uncertainty' }
    : { kind: 'read', value: half }
}
