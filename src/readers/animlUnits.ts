/**
 * Units of AnIML series. A Unit has a label for people and SIUnits (factor, exponent, offset) for programs; where the two
 * contradict each other there are two readings, and none is taken.
 */
import { childrenOf, type Element, type Flaw } from './animlXml.ts'
import type { AxisUnit, ReadingHints } from './types.ts'
import { axisWords, plainWords } from './words.ts'

export type UnitFlaw = Flaw<ReadingHints>

/** What the SIUnits of a Unit say; null fields where there are none. */
export interface SiMeaning {
  /** Exponents by SI unit, such as `m1` or `kg1 m2 s-2`; empty for numbers without unit. */
  readonly dimension: string
  /** The factor: of the unit with its exponent, and of the unit before it is raised. They differ only where an exponent is not 1. */
  readonly factors: readonly [number, number]
  readonly offset: number
}

export interface WrittenUnit {
  readonly kind: 'unit'
  readonly element: Element
  readonly label: string
  readonly quantity: string
  readonly si: SiMeaning | null
}

const flaw = (
  at: Element,
  code: string,
  what: string,
  remedy: string,
  settle: readonly ReadingHints[] = [],
): UnitFlaw => ({
  kind: 'flaw',
  code,
  offset: at.offset,
  what,
  remedy,
  settle,
})

/** The unit of a series or parameter, wherever it stands among the values; null where there is none. */
export const unitOf = (element: Element): WrittenUnit | null | UnitFlaw => {
  const [unit, second] = childrenOf(element, 'Unit')
  if (!unit) return null
  if (second) return flaw(second, 'two-units', 'two units for one series', 'export the file again')
  const label = (unit.attributes.label ?? '').normalize('NFKC').trim()
  const quantity = unit.attributes.quantity ?? ''
  const parts = childrenOf(unit, 'SIUnit')
  if (parts.length === 0) return { kind: 'unit', element: unit, label, quantity, si: null }
  const dimension = new Map<string, number>()
  let [outside, inside, offset] = [1, 1, 0]
  for (const part of parts) {
    const [factor, exponent, added] = [
      attribute(part, 'factor', 1),
      attribute(part, 'exponent', 1),
      attribute(part, 'offset', 0),
    ]
    if (!(factor > 0) || !Number.isFinite(exponent) || !Number.isFinite(added))
      return flaw(
        part,
        'bad-unit',
        'factor, exponent or offset of an SIUnit is no number that a unit can have',
        'export the file again',
      )
    outside *= factor
    inside *= factor ** exponent
    offset += added
    const name = part.text.trim()
    if (name !== '1' && name !== '') dimension.set(name, (dimension.get(name) ?? 0) + exponent)
  }
  const written = [...dimension].filter(([, exponent]) => exponent !== 0).map(([name, exponent]) => name + exponent)
  return {
    kind: 'unit',
    element: unit,
    label,
    quantity,
    si: { dimension: written.sort().join(' '), factors: [outside, inside], offset },
  }
}

const attribute = (element: Element, name: string, absent: number): number => {
  const text = element.attributes[name]?.trim()
  if (text === undefined) return absent
  return text === '' ? Number.NaN : Number(text)
}

interface AxisMeaning {
  readonly x: AxisUnit
  /** Multiplies and divides the values of the file to give `x`; one of them is 1, so that nothing is rounded twice. */
  readonly times: number
  readonly over: number
  readonly dimension: string
  readonly factor: number
}

const meaning = (x: AxisUnit, dimension: string, factor: number, times = 1, over = 1): AxisMeaning => ({
  x,
  times,
  over,
  dimension,
  factor,
})
const EV_IN_J = 1.602176634e-19 // exact, SI 2019
const NM = meaning('nm', 'm1', 1e-9)
const UM = meaning('um', 'm1', 1e-6)
const PM = meaning('nm', 'm1', 1e-12, 1, 1000)
const ANGSTROM = meaning('nm', 'm1', 1e-10, 1, 10)
const METRE = meaning('nm', 'm1', 1, 1e9)
const PER_CM = meaning('cm^-1', 'm-1', 100)
const PER_M = meaning('cm^-1', 'm-1', 1, 1, 100)
const EV = meaning('eV', 'kg1 m2 s-2', EV_IN_J)
const ALL = [NM, UM, PM, ANGSTROM, METRE, PER_CM, PER_M, EV]

/** Labels as they are spelled after plainWords (which turns µ into the Greek letter and ⁻¹ into -1). */
const LABELS: readonly (readonly [RegExp, AxisMeaning])[] = [
  [/^(?:nm|nanomet(?:er|re)s?)$/, NM],
  [/^(?:[uμ]m|micromet(?:er|re)s?|microns?)$/, UM],
  [/^(?:pm|picomet(?:er|re)s?)$/, PM],
  [/^angstroms?$/, ANGSTROM],
  [/^m$/, METRE],
  [/^(?:1 ?\/ ?cm|cm ?\^? ?\(?-1\)?|\/ ?cm|per ?cm)$/, PER_CM],
  [/^(?:1 ?\/ ?m|m ?\^? ?\(?-1\)?)$/, PER_M],
  [/^(?:ev|electron ?volts?)$/, EV],
]

export type AxisReading =
  | {
      readonly kind: 'axis'
      readonly x: AxisUnit
      readonly times: number
      readonly over: number
      readonly said: string
    }
  | { readonly kind: 'time' }
  | UnitFlaw

/** The unit of an independent series; `time` where it is no axis of a spectrum but of a course in time. */
export const axisOf = (series: Element, unit: WrittenUnit | null): AxisReading => {
  const settle = 'say which with `reading: { x: … }`'
  if (unit === null) return flaw(series, 'axis-unit', 'the axis has no unit', settle)
  const { label, si, element } = unit
  const named = LABELS.find(([spelling]) => spelling.test(plainWords(label.replace(/^Å$/, 'angstrom'))))?.[1] ?? null
  if (si !== null && si.dimension === 's1') return { kind: 'time' }
  if (si === null && /^(?:s|sec|seconds?|min|minutes?|h|hours?)$/i.test(label)) return { kind: 'time' }
  const fits = (m: AxisMeaning) =>
    si === null || (si.dimension === m.dimension && si.factors.some((f) => Math.abs(f / m.factor - 1) < 1e-3))
  if (si !== null && si.offset !== 0)
    return flaw(element, 'axis-unit', `a unit of an axis with an offset of ${si.offset} has no meaning`, settle)
  const bySi = si === null ? [] : ALL.filter(fits)
  const found = named ?? (bySi.length === 1 ? bySi[0]! : null)
  if (found === null) return flaw(element, 'axis-unit', `"${label}" is no unit of an axis that is read here`, settle)
  if (!fits(found)) {
    const what = `the label says ${label}, the SIUnits say ${si!.factors[0]} ${si!.dimension || '(no unit)'}`
    return flaw(element, 'unit-contradiction', what, settle, [{ x: found.x }])
  }
  const contradiction = wordsAgainst(found, [unit.quantity, series.attributes.name ?? ''])
  if (contradiction !== null)
    return flaw(
      element,
      'unit-contradiction',
      `the unit is ${label}, but the axis is called "${contradiction}"`,
      settle,
      [{ x: found.x }],
    )
  return { kind: 'axis', x: found.x, times: found.times, over: found.over, said: label }
}

const KIND: Readonly<Record<AxisUnit, string>> = {
  nm: 'wavelength',
  um: 'wavelength',
  'cm^-1': 'wavenumber',
  eV: 'energy',
}

/** The first of the words that name another kind of axis than its unit is of. */
const wordsAgainst = ({ x }: AxisMeaning, words: readonly string[]): string | null =>
  words.find((word) => {
    const { units, quantity } = axisWords(word)
    const kind = quantity ?? (units.length === 1 && units[0] !== 'angstrom' ? KIND[units[0]!] : null)
    return kind !== null && kind !== KIND[x]
  }) ?? null
