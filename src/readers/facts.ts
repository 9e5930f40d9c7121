/** Facts of a measurement from `key: value` pairs: sample, time, path length, temperature, concentration. */
import type { Fault } from '../fault.ts'
import { numberOf } from './numbers.ts'
import { timeOf, timeOfParts } from './times.ts'
import type { Medium, WrittenTime } from './types.ts'
import { type Fact, factOf, plainWords } from './words.ts'

export interface Pair {
  readonly key: string
  readonly value: string
  readonly line: number
}

export interface Facts {
  readonly sample: string | null
  readonly title: string | null
  readonly time: WrittenTime | null
  readonly pathMm: number | null
  readonly temperatureC: number | null
  readonly concentrationMolPerL: number | null
  readonly medium: Medium | null
  readonly header: Readonly<Record<string, string>>
  readonly warnings: readonly Fault[]
}

/** A number followed or headed by its unit, under either decimal mark where only one is possible. */
const quantity = (pair: Pair): { readonly value: number; readonly unit: string } | null => {
  const m = /^([+-]?[\d.,]+(?:[eE][+-]?\d+)?)\s*(.*)$/.exec(pair.value.trim().replace(/[\u2212]/g, '-'))
  if (!m) return null
  const value = numberOf(m[1]!, '.') ?? numberOf(m[1]!, ',')
  // 1,234 and 1.234 could hold a thousands mark: nobody writes a path or a temperature that way, but a guess is none of ours
  if (value === null || (/^\d{1,3},\d{3}$/.test(m[1]!) && !m[1]!.startsWith('0'))) return null
  const bracket = /[([]\s*([^)\]]+?)\s*[)\]]\s*$/.exec(pair.key)?.[1]
  return { value, unit: (m[2] !== '' ? m[2]! : (bracket ?? '')).normalize('NFKC').trim() }
}

const MM: Readonly<Record<string, number>> = {
  mm: 1,
  cm: 10,
  µm: 1e-3,
  μm: 1e-3,
  um: 1e-3,
  m: 1000,
  millimeter: 1,
  centimeter: 10,
}
const MOLAR: Readonly<Record<string, number>> = {
  'mol/l': 1,
  m: 1,
  'mol/dm3': 1,
  'mol l-1': 1,
  'mmol/l': 1e-3,
  mm: 1e-3,
  'mol/m3': 1e-3,
  'µmol/l': 1e-6,
  'μmol/l': 1e-6,
  'umol/l': 1e-6,
}

const scaled = (pair: Pair, table: Readonly<Record<string, number>>): number | null => {
  const q = quantity(pair)
  if (q === null) return null
  const unit = q.unit.toLowerCase().replace(/[·*]/g, ' ').replace(/\^/g, '')
  // a file may name a unit `constructor`
  return Object.hasOwn(table, unit) ? Number((q.value * table[unit]!).toPrecision(12)) : null
}

const celsius = (pair: Pair): number | null => {
  const q = quantity(pair)
  if (q === null) return null
  if (/^(?:°\s?c|deg\s?c|c|celsius|℃)$/i.test(q.unit)) return q.value
  return /^k(?:elvin)?$/i.test(q.unit) ? Number((q.value - 273.15).toPrecision(12)) : null
}

/** Gathers the facts; what was named but cannot be read in one way becomes a warning and null. */
export const factsOf = (pairs: readonly Pair[], file: string): Facts => {
  const warnings: Fault[] = []
  const header: Record<string, string> = {}
  for (const { key, value } of pairs) header[plainWords(key)] ??= value
  const of = (fact: Fact) => pairs.filter((pair) => factOf(pair.key) === fact && pair.value !== '')
  const warn = (pair: Pair, code: string, what: string, remedy: string) =>
    warnings.push({ code, place: { at: file, line: pair.line }, what, remedy })
  const one = <T>(fact: Fact, read: (pair: Pair) => T | null, form: string): T | null => {
    const pair = of(fact)[0]
    if (!pair) return null
    const value = read(pair)
    if (value === null)
      warn(pair, `${fact}-unclear`, `"${pair.key}: ${pair.value}" cannot be read`, `write it as ${form}`)
    return value
  }
  const [moment, date, clock] = [of('datetime')[0], of('date')[0], of('time')[0]]
  const reading = moment
    ? timeOf(moment.value)
    : date
      ? clock
        ? timeOfParts(date.value, clock.value)
        : timeOf(date.value)
      : null
  if (reading?.kind === 'unclear') {
    warn(
      moment ?? date!,
      'time-unclear',
      `the time of measurement cannot be read: ${reading.why}`,
      'write it as 2026-03-02T09:00:00+01:00',
    )
  }
  const medium = of('medium')[0]?.value.trim().toLowerCase()
  return {
    sample: of('sample')[0]?.value ?? null,
    title: of('title')[0]?.value ?? null,
    time: reading?.kind === 'time' ? reading.time : null,
    pathMm: one('path', (pair) => scaled(pair, MM), '10 mm'),
    temperatureC: one('temperature', celsius, '25 °C'),
    concentrationMolPerL: one('concentration', (pair) => scaled(pair, MOLAR), '0.012 mol/L'),
    medium: medium === 'air' || medium === 'vacuum' ? medium : null,
    header,
    warnings,
  }
}
