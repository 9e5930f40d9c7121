import type { Occasion, Window } from '../series/types.ts'
import {
  CONCENTRATION,
  type Dimension,
  KELVIN_AT_ZERO_C,
  LENGTH,
  PLAIN,
  TEMPERATURE,
  TIME,
  UNIT_NAMES,
  WAVENUMBER,
} from './dimension.ts'

/** A name of the rule language: what it measures and how its stored number becomes a number in base units. */
export interface Name {
  readonly name: string
  readonly dimension: Dimension
  /** Unit in which it is stored and told in letters. */
  readonly unit: string
  /** base = stored · size + zero */
  readonly size: number
  readonly zero: number
  /** A measured quantity has an uncertainty and a reference; `age` and `gap` are read off the clock of the series. */
  readonly measured: boolean
  /** Stored number of one occasion of a window; null where it could not be had. */
  readonly read: (window: Window, index: number) => number | null
}

/** The window's occasion at an index that the caller knows to be inside. */
const at = (window: Window, index: number): Occasion => window.occasions[index]!

const valueAt = (window: Window, index: number, name: string): number | null => at(window, index).values[name] ?? null

const quantity = (name: string, dimension: Dimension, unit: string): Name => ({
  name,
  dimension,
  unit,
  size: 1,
  zero: 0,
  measured: true,
  read: (window, index) => valueAt(window, index, name),
})

const MS_PER_HOUR = 3_600_000
const SIX = [1, 2, 3, 4, 5, 6]
const WAVENUMBERS = ['delta_o', 'b', 'c', ...['nu', 'max', 'width'].flatMap((stem) => SIX.map((n) => `${stem}${n}`))]
const NUMBERS = [
  ...['beta', 'dq_over_b', ...SIX.map((n) => `height${n}`), 'area_ratio21', 'scatter', 'offset'],
  ...['rms', 'noise', 'reduced_chi2', 'delta_e', 'extent'],
]

const all: readonly Name[] = [
  ...WAVENUMBERS.map((name) => quantity(name, WAVENUMBER, 'cm^-1')),
  ...NUMBERS.map((name) => quantity(name, PLAIN, '1')),
  {
    ...quantity('temperature', TEMPERATURE, 'degC'),
    zero: KELVIN_AT_ZERO_C,
    read: (window, index) => valueAt(window, index, 'temperature') ?? window.temperatureC,
  },
  {
    ...quantity('path', LENGTH, 'mm'),
    size: 0.1,
    read: (window, index) => valueAt(window, index, 'path') ?? window.pathMm,
  },
  {
    ...quantity('concentration', CONCENTRATION, 'mol/L'),
    size: 1e-3,
    read: (window, index) => valueAt(window, index, 'concentration') ?? window.concentrationMolPerL,
  },
  {
    ...quantity('age', TIME, 'h'),
    size: 3600,
    measured: false,
    read: (window, index) => (window.began === null ? null : (at(window, index).at - window.began) / MS_PER_HOUR),
  },
  {
    ...quantity('gap', TIME, 'h'),
    size: 3600,
    measured: false,
    read: (window, index) => (index === 0 ? null : (at(window, index).at - at(window, index - 1).at) / MS_PER_HOUR),
  },
]

/** Names that stand for a number, in the order of the contract's table. */
export const NAMES: ReadonlyMap<string, Name> = new Map(all.map((name) => [name.name, name]))

/** Functions and the numbers of arguments that they take. */
export const FUNCTIONS: ReadonlyMap<string, readonly [least: number, most: number]> = new Map<
  string,
  readonly [number, number]
>([
  ...['absorbance', 'wavelength', 'u', 'reference', 'u_reference', 'previous', 'count'].map(
    (f) => [f, [1, 1]] as const,
  ),
  ...['mean', 'median', 'sd', 'slope', 'u_slope', 'run_above', 'run_below'].map((f) => [f, [2, 2]] as const),
  ...['abs', 'sqrt', 'exp', 'log', 'log10'].map((f) => [f, [1, 1]] as const),
  ...['min', 'max'].map((f) => [f, [1, 20]] as const),
])

export const KEYWORDS: ReadonlySet<string> = new Set(['and', 'or', 'not'])

/** Every word that may stand in an expression. */
export const WORDS: readonly string[] = [...NAMES.keys(), ...FUNCTIONS.keys(), ...KEYWORDS, ...UNIT_NAMES]
