import { PER_CM_OF_EV } from '../rules/dimension.ts'
import { suggestion } from '../rules/suggest.ts'

/**
 * What a quantity measures, and the unit in which it is handed on:
 * duration ms, temperature degC, length mm, concentration mol/L, wavelength nm, wavenumber cm^-1, number 1,
 * spectral nm or cm^-1 as written (a position on the axis, not yet converted: that needs the medium).
 */
export type Dimension =
  | 'duration'
  | 'temperature'
  | 'length'
  | 'concentration'
  | 'wavelength'
  | 'wavenumber'
  | 'spectral'
  | 'number'

export type QuantityReading =
  | { readonly kind: 'read'; readonly value: number; readonly unit: string }
  | { readonly kind: 'refused'; readonly what: string; readonly remedy: string }

/** value in the unit handed on = written · size + zero */
interface Unit {
  readonly to: string
  readonly size: number
  readonly zero?: number
}

const WAVELENGTHS: Readonly<Record<string, Unit>> = {
  nm: { to: 'nm', size: 1 },
  um: { to: 'nm', size: 1000 },
  µm: { to: 'nm', size: 1000 },
}
const WAVENUMBERS: Readonly<Record<string, Unit>> = {
  'cm^-1': { to: 'cm^-1', size: 1 },
  eV: { to: 'cm^-1', size: PER_CM_OF_EV },
}
const UNITS: Readonly<Record<Dimension, Readonly<Record<string, Unit>>>> = {
  duration: {
    s: { to: 'ms', size: 1000 },
    min: { to: 'ms', size: 60_000 },
    h: { to: 'ms', size: 3_600_000 },
    d: { to: 'ms', size: 86_400_000 },
    day: { to: 'ms', size: 86_400_000 },
    week: { to: 'ms', size: 604_800_000 },
  },
  temperature: { degC: { to: 'degC', size: 1 }, K: { to: 'degC', size: 1, zero: -273.15 } },
  length: { mm: { to: 'mm', size: 1 }, cm: { to: 'mm', size: 10 } },
  concentration: { 'mol/L': { to: 'mol/L', size: 1 }, 'mmol/L': { to: 'mol/L', size: 1e-3 } },
  wavelength: WAVELENGTHS,
  wavenumber: WAVENUMBERS,
  spectral: { ...WAVELENGTHS, ...WAVENUMBERS },
  number: {},
}

/** Other ways in which people write the same units. */
const MEANT: Readonly<Record<string, string>> = {
  'cm-1': 'cm^-1',
  'cm⁻¹': 'cm^-1',
  '1/cm': 'cm^-1',
  'cm**-1': 'cm^-1',
  '°C': 'degC',
  C: 'degC',
  days: 'd',
  hours: 'h',
  hour: 'h',
  hr: 'h',
  m: 'min',
  minutes: 'min',
  weeks: 'week',
  w: 'week',
  sec: 's',
  M: 'mol/L',
  mM: 'mmol/L',
  'mol/l': 'mol/L',
  'mmol/l': 'mmol/L',
  μm: 'um',
}

const EXAMPLES: Readonly<Record<Dimension, string>> = {
  duration: '6 h',
  temperature: '40 degC',
  length: '10 mm',
  concentration: '0.012 mol/L',
  wavelength: '0.3 nm',
  wavenumber: '60 cm^-1',
  spectral: '512 nm',
  number: '2',
}

const QUANTITY = /^([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(\S*)$/

/** Units that fit a dimension, in words for sentences and for the published schema. */
export const unitsOf = (dimension: Dimension): readonly string[] => Object.keys(UNITS[dimension])

/** One quantity of a dimension, as a person would write it. */
export const exampleOf = (dimension: Dimension): string => EXAMPLES[dimension]

/** Reads `60 cm^-1`, `6 h`, `40 degC` …; a wrong or missing unit is refused and the units that fit are named. */
export const parseQuantity = (text: string, dimension: Dimension): QuantityReading => {
  const found = QUANTITY.exec(text.trim())
  if (found === null) return notAQuantity(text, dimension)
  const [, written, unit] = found as unknown as [string, string, string]
  const known = dimension === 'number' && unit === '' ? { to: '1', size: 1 } : ownUnit(UNITS[dimension], unit)
  if (known === undefined) return wrongUnit(text, unit, dimension)
  const value = Number(written) * known.size + (known.zero ?? 0)
  if (!Number.isFinite(value))
    return { kind: 'refused', what: `${text} is too large`, remedy: 'write a smaller number' }
  if (dimension === 'temperature' && value < -273.15)
    return { kind: 'refused', what: `${text} lies below absolute zero`, remedy: 'mend the temperature' }
  return { kind: 'read', value, unit: known.to }
}

const ownUnit = (units: Readonly<Record<string, Unit>>, name: string): Unit | undefined =>
  Object.hasOwn(units, name) ? units[name] : undefined

const notAQuantity = (text: string, dimension: Dimension): QuantityReading => ({
  kind: 'refused',
  what: text.trim() === '' ? 'no value' : `"${text}" is no ${dimension === 'number' ? 'number' : 'quantity'}`,
  remedy: /^\s*[+-]?\d+,\d+/.test(text)
    ? 'write a decimal point, not a comma'
    : `write a number${dimension === 'number' ? '' : ' and its unit'}, such as ${exampleOf(dimension)}`,
})

const wrongUnit = (text: string, unit: string, dimension: Dimension): QuantityReading => {
  const fitting = unitsOf(dimension)
  if (fitting.length === 0)
    return {
      kind: 'refused',
      what: `"${text}" has a unit where a plain number is wanted`,
      remedy: 'leave the unit out',
    }
  const what = unit === '' ? `"${text}" has no unit` : `"${text}" has a unit that does not fit here`
  const near = Object.hasOwn(MEANT, unit) ? MEANT[unit]! : suggestion(unit, fitting)
  const meant = near !== null && unit !== '' && fitting.includes(near) ? `did you mean ${near}? ` : ''
  return { kind: 'refused', what, remedy: `${meant}the units that fit are ${fitting.join(', ')}` }
}
