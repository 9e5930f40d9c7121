/**
 * Dimensions and units of the rule language. Every number is brought to one coherent set of base units when the rule
 * is read: cm, s, K, mol. A wavenumber is an inverse length; an energy in eV is read as the wavenumber E/hc, as
 * spectroscopists write it (1 eV = e/hc = 8065.543937 cm⁻¹, exact constants of the SI since 2019).
 */

/** Exponents of length, time, temperature, amount. Halves occur under a square root. */
export type Dimension = readonly [length: number, time: number, temperature: number, amount: number]

export const PLAIN: Dimension = [0, 0, 0, 0]
export const WAVENUMBER: Dimension = [-1, 0, 0, 0]
export const LENGTH: Dimension = [1, 0, 0, 0]
export const TIME: Dimension = [0, 1, 0, 0]
export const TEMPERATURE: Dimension = [0, 0, 1, 0]
export const CONCENTRATION: Dimension = [-3, 0, 0, 1]

export interface Unit {
  readonly dimension: Dimension
  /** Size in base units. */
  readonly size: number
}

/** Charge of the electron over h·c, cm⁻¹ per eV. */
export const PER_CM_OF_EV = 1.602176634e-19 / (6.62607015e-34 * 2.99792458e10)
export const KELVIN_AT_ZERO_C = 273.15

const VOLUME: Dimension = [3, 0, 0, 0]
const AMOUNT: Dimension = [0, 0, 0, 1]
const UNITS: ReadonlyMap<string, Unit> = new Map<string, Unit>([
  ['nm', { dimension: LENGTH, size: 1e-7 }],
  ['um', { dimension: LENGTH, size: 1e-4 }],
  ['μm', { dimension: LENGTH, size: 1e-4 }],
  ['mm', { dimension: LENGTH, size: 0.1 }],
  ['cm', { dimension: LENGTH, size: 1 }],
  ['eV', { dimension: WAVENUMBER, size: PER_CM_OF_EV }],
  ['s', { dimension: TIME, size: 1 }],
  ['min', { dimension: TIME, size: 60 }],
  ['h', { dimension: TIME, size: 3600 }],
  ['d', { dimension: TIME, size: 86_400 }],
  ['day', { dimension: TIME, size: 86_400 }],
  ['week', { dimension: TIME, size: 604_800 }],
  ['K', { dimension: TEMPERATURE, size: 1 }],
  ['degC', { dimension: TEMPERATURE, size: 1 }],
  ['mol', { dimension: AMOUNT, size: 1 }],
  ['mmol', { dimension: AMOUNT, size: 1e-3 }],
  ['L', { dimension: VOLUME, size: 1000 }],
])

export const unitOf = (name: string): Unit | undefined => UNITS.get(name)
export const UNIT_NAMES: readonly string[] = [...UNITS.keys()]

export const product = (a: Dimension, b: Dimension, power = 1): Dimension => [
  a[0] + power * b[0],
  a[1] + power * b[1],
  a[2] + power * b[2],
  a[3] + power * b[3],
]

export const raised = (a: Dimension, power: number): Dimension => product(PLAIN, a, power)

/** Exponents are sums of halves and integers, or of what a person wrote (`^0.3`): compared with room for rounding. */
export const sameDimension = (a: Dimension, b: Dimension): boolean => a.every((x, i) => Math.abs(x - b[i]!) < 1e-9)

export const isPlain = (a: Dimension): boolean => sameDimension(a, PLAIN)

/** `cm^-1`, `cm^-1 s^-1`, `a plain number`: for sentences. */
export const sayDimension = (a: Dimension): string => {
  if (isPlain(a)) return 'a plain number'
  if (sameDimension(a, CONCENTRATION)) return 'mol/L'
  const symbols = ['cm', 's', 'K', 'mol']
  const say = (power: number, symbol: string) => (power === 1 ? symbol : `${symbol}^${Number(power.toFixed(3))}`)
  return a.flatMap((power, i) => (Math.abs(power) < 1e-9 ? [] : [say(power, symbols[i]!)])).join(' ')
}
