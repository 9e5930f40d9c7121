/**
 * Value sets of an AnIML series (ASTM E13.15 core): listed one by one, counted up from a start, or base64 of little-endian numbers.
 * `startIndex` and `endIndex` count from 0, both included; several sets of a series must fill it without hole or overlap.
 */
import { childrenOf, type Element, type Flaw } from './animlXml.ts'

/** Types of numbers: the element that holds one, and bytes of one when encoded. */
const TYPES = {
  Int32: { tag: 'I', bytes: 4, whole: true, read: (v: DataView, at: number) => v.getInt32(at, true) },
  Int64: { tag: 'L', bytes: 8, whole: true, read: (v: DataView, at: number) => Number(v.getBigInt64(at, true)) },
  Float32: { tag: 'F', bytes: 4, whole: false, read: (v: DataView, at: number) => v.getFloat32(at, true) },
  Float64: { tag: 'D', bytes: 8, whole: false, read: (v: DataView, at: number) => v.getFloat64(at, true) },
} as const

export type NumberType = keyof typeof TYPES
type SetName = 'IndividualValueSet' | 'AutoIncrementedValueSet' | 'EncodedValueSet'

const NUMBER_TAGS: ReadonlySet<string> = new Set(['I', 'L', 'F', 'D'])
const MOST_VALUES = 1_000_000

export interface Values {
  readonly kind: 'values'
  readonly values: Float64Array
  /** How they are written: `individual`, `auto-incremented`, `encoded`. */
  readonly forms: readonly string[]
  /** Where value i stands in the text. */
  readonly offsetOf: (i: number) => number
}

interface Part {
  readonly kind: 'part'
  readonly first: number
  readonly values: Float64Array
  readonly set: Element
}

const flaw = (at: Element, code: string, what: string, remedy = 'export the file again'): Flaw => ({
  kind: 'flaw',
  code,
  offset: at.offset,
  what,
  remedy,
})

/** Whether a series of this `seriesType` holds numbers. */
export const isNumberType = (type: string | undefined): type is NumberType =>
  type !== undefined && Object.hasOwn(TYPES, type)

/** The values of a series; `length` is what its set says, null where it says nothing. */
export const valuesOf = (series: Element, type: NumberType, length: number | null): Values | Flaw => {
  const sets = series.children.filter(({ name }) => Object.hasOwn(FORMS, name))
  if (sets.length === 0) return flaw(series, 'no-values', `series "${series.attributes.name ?? ''}" has no values`)
  const parts: Part[] = []
  let next = 0
  for (const set of sets) {
    const part = partOf(set, type, next, length)
    if (part.kind === 'flaw') return part
    next = part.first + part.values.length
    parts.push(part)
  }
  parts.sort((a, b) => a.first - b.first)
  let total = 0
  for (const { first, values, set } of parts) {
    if (first !== total) {
      const how = first > total ? `leave out index ${total}` : `give index ${first} twice`
      return flaw(set, 'index-gap', `the value sets of series "${series.attributes.name ?? ''}" ${how}`)
    }
    total += values.length
  }
  if (length !== null && total !== length) {
    const what = `SeriesSet says length ${length}, series "${series.attributes.name ?? ''}" has ${total} values`
    return flaw(series, 'series-length', what, 'values are missing or were added: export the file again')
  }
  const values = new Float64Array(total)
  for (const part of parts) values.set(part.values, part.first)
  return {
    kind: 'values',
    values,
    forms: [...new Set(sets.map(({ name }) => FORMS[name as SetName]))],
    offsetOf: (i) => {
      const part = parts.findLast(({ first }) => first <= i) ?? parts[0]!
      return (
        (part.set.name === 'IndividualValueSet' ? part.set.children[i - part.first] : part.set)?.offset ?? series.offset
      )
    },
  }
}

const FORMS: Readonly<Record<SetName, string>> = {
  IndividualValueSet: 'individual',
  AutoIncrementedValueSet: 'auto-incremented',
  EncodedValueSet: 'encoded',
}

const indexOf = (set: Element, name: 'startIndex' | 'endIndex'): number | null | Flaw => {
  const text = set.attributes[name]?.trim()
  if (text === undefined) return null
  if (/^\+?\d{1,9}$/.test(text)) return Number(text)
  return flaw(set, 'bad-index', `${name}="${text}" is no index`)
}

const partOf = (set: Element, type: NumberType, next: number, length: number | null): Part | Flaw => {
  const [start, end] = [indexOf(set, 'startIndex'), indexOf(set, 'endIndex')]
  if (start !== null && typeof start === 'object') return start
  if (end !== null && typeof end === 'object') return end
  const first = start ?? next
  const said = end === null ? null : end - first + 1
  if (said !== null && said < 1) return flaw(set, 'bad-index', `endIndex ${end} lies before startIndex ${first}`)
  const decoded =
    set.name === 'AutoIncrementedValueSet'
      ? counted(set, type, said ?? (length === null ? null : length - first))
      : set.name === 'EncodedValueSet'
        ? encoded(set, type)
        : individual(set, type)
  if (!(decoded instanceof Float64Array)) return decoded
  if (said !== null && said !== decoded.length)
    return flaw(
      set,
      'index-count',
      `startIndex ${first} to endIndex ${end} are ${said} values, there are ${decoded.length}`,
    )
  return { kind: 'part', first, values: decoded, set }
}

const NUMBER = /^[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d{1,3})?$/
const WORDS: Readonly<Record<string, number>> = { NaN: Number.NaN, INF: Infinity, '-INF': -Infinity }

/** A number as XML Schema writes it, in the element of its type. */
const numberIn = (element: Element, type: NumberType): number | Flaw => {
  const text = element.text.trim()
  const bad = (why: string) => flaw(element, 'bad-number', `"${text.slice(0, 40)}" ${why}`)
  if (!NUMBER_TAGS.has(element.name))
    return flaw(element, 'bad-number', `<${element.name}> holds no number of a series of ${type}`)
  const { whole, bytes } = TYPES[type]
  if (!whole && Object.hasOwn(WORDS, text)) return WORDS[text]!
  const value = NUMBER.test(text) ? Number(text) : Number.NaN
  if (!Number.isFinite(value)) return bad('is no number')
  if (whole && !/^[+-]?\d+$/.test(text)) return bad(`is no whole number, as ${type} demands`)
  if (whole && !(bytes === 4 ? Math.abs(value) <= 2 ** 31 : Number.isSafeInteger(value)))
    return bad(`is too large for ${type}`)
  return value
}

const individual = (set: Element, type: NumberType): Float64Array | Flaw => {
  const values = new Float64Array(set.children.length)
  for (const [i, child] of set.children.entries()) {
    const value = numberIn(child, type)
    if (typeof value !== 'number') return value
    values[i] = value
  }
  if (set.children.length === 0 && set.text.trim() !== '')
    return flaw(set, 'bad-number', 'the values stand in no elements', `write each as <${TYPES[type].tag}>`)
  return values
}

const counted = (set: Element, type: NumberType, count: number | null): Float64Array | Flaw => {
  if (count === null)
    return flaw(
      set,
      'no-length',
      'values are counted up, but neither endIndex nor the length of the SeriesSet says how far',
    )
  if (count < 0 || count > MOST_VALUES) return flaw(set, 'too-large', `${count} values cannot be right`)
  const pair: number[] = []
  for (const name of ['StartValue', 'Increment'] as const) {
    const [holder, second] = childrenOf(set, name)
    const [element, more] = holder?.children ?? []
    if (!holder || second || !element || more)
      return flaw(holder ?? set, 'bad-number', `${name} must stand once, with one number in it`)
    const value = numberIn(element, type)
    if (typeof value !== 'number') return value
    if (!Number.isFinite(value) || (name === 'Increment' && value === 0 && count > 1))
      return flaw(element, 'bad-number', `${name} cannot be ${element.text.trim()}`)
    pair.push(value)
  }
  const [start, increment] = pair as [number, number]
  return Float64Array.from({ length: count }, (_, i) => start + i * increment)
}

const encoded = (set: Element, type: NumberType): Float64Array | Flaw => {
  const text = set.text.replace(/[\t\n\r ]+/g, '')
  const bytes = Buffer.from(text, 'base64')
  // decoding forgives anything; only what encodes to the same text again was whole
  if (bytes.toString('base64') !== text) return flaw(set, 'bad-base64', 'this is no base64, or a part of it is missing')
  const { bytes: size, read, whole } = TYPES[type]
  if (bytes.length % size !== 0)
    return flaw(set, 'bad-base64', `${bytes.length} bytes are no whole number of ${type} values of ${size} bytes`)
  if (bytes.length / size > MOST_VALUES) return flaw(set, 'too-large', `${bytes.length / size} values are too many`)
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.length)
  const values = Float64Array.from({ length: bytes.length / size }, (_, i) => read(view, i * size))
  // numbers of a measurement read in the wrong byte order, or in the wrong size, become absurdly small or large
  const absurd = values.find(
    (v) =>
      Number.isFinite(v) && v !== 0 && (whole ? !Number.isSafeInteger(v) : Math.abs(v) < 1e-25 || Math.abs(v) > 1e25),
  )
  if (absurd === undefined) return values
  return flaw(
    set,
    'absurd-values',
    `decoded as little-endian ${type}, a value is ${absurd}`,
    'the standard demands little-endian numbers of the type that seriesType names: export the file again',
  )
}
