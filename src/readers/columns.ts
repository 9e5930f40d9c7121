/** Which column is the axis, which are ordinates, and of what kind: from headings, else from values, else not at all. */

import { canBe, unitsByValue } from './axis.ts'
import type { Surroundings } from './headings.ts'
import type { AxisUnit, OrdinateKind, ReadingHints } from './types.ts'
import { axisWords, factOf, type OrdinateWords, ordinateKind, ordinateWords, plainWords } from './words.ts'

export interface Complaint {
  readonly code: string
  readonly what: string
  readonly remedy: string
  /** Column of the table, from 0. */
  readonly column?: number
  /** Completions of `reading:` that would settle it. */
  readonly settle?: readonly ReadingHints[]
}

export type Choice<T> =
  | { readonly kind: 'chosen'; readonly value: T; readonly warnings: readonly Complaint[] }
  | { readonly kind: 'open'; readonly complaint: Complaint }

/** An axis column and the ordinate columns that belong to it. */
export interface Group {
  readonly x: number
  readonly ys: readonly number[]
}

const open = (complaint: Complaint): { readonly kind: 'open'; readonly complaint: Complaint } => ({
  kind: 'open',
  complaint,
})

/** Whether values rise, or fall, from each to the next. */
export const isMonotone = (x: Float64Array): boolean => {
  const sign = Math.sign((x[1] ?? 0) - (x[0] ?? 0))
  for (let i = 1; i < x.length; i++) if (!((x[i]! - x[i - 1]!) * sign > 0)) return false
  return x.length > 1
}

const isIndex = (x: Float64Array): boolean => (x[0] === 0 || x[0] === 1) && x.every((v, i) => v === x[0]! + i)
const INDEX_WORD = /^(?:|#|no\.?|nr\.?|n°|index|points?|pt|pixel|punkt|lfd\.? ?nr\.?|numero|num|row|zeile|ligne|fila)$/

const namesAxis = (label: string): boolean => {
  const words = axisWords(label)
  return (words.units.length > 0 || words.quantity !== null) && ordinateWords(label).kind !== 'known'
}

/** Splits the columns into axes and ordinates. `filled(c)` holds the numbers of a column down to its last filled cell. */
export const groupColumns = (
  labels: readonly string[],
  filled: (column: number) => Float64Array,
  hints: ReadingHints,
): Choice<readonly Group[]> => {
  const all = labels.map((_, c) => c)
  const named = all.filter((c) => namesAxis(labels[c]!))
  const index =
    labels.length >= 3 && !named.includes(0) && INDEX_WORD.test(plainWords(labels[0]!)) && isIndex(filled(0)) ? 0 : -1
  const rest = all.filter((c) => c !== index)
  const chosen = (value: readonly Group[]): Choice<readonly Group[]> => ({ kind: 'chosen', value, warnings: [] })
  if (named.length > 1) {
    if (labels.length % 2 === 0 && named.length === labels.length / 2 && named.every((c, k) => c === 2 * k)) {
      return chosen(named.map((c) => ({ x: c, ys: [c + 1] })))
    }
    const [a, b] = named as [number, number]
    const [xa, xb] = [filled(a), filled(b)]
    const same =
      named.length === 2 && xa.length === xb.length && xa.every((v, i) => Math.abs((v * xb[i]!) / 1e7 - 1) < 1e-3)
    if (same) return chosen([{ x: a, ys: rest.filter((c) => c !== a && c !== b) }])
    return open({
      code: 'which-axis',
      what: `columns ${named.map((c) => `${c + 1} ("${labels[c]}")`).join(' and ')} may each be the axis`,
      remedy: 'export one axis, or pairs of axis and ordinate',
    })
  }
  const only = named[0]
  if (only !== undefined) return chosen([{ x: only, ys: rest.filter((c) => c !== only) }])
  const first = rest[0]!
  if (rest.length >= 4 && rest.length % 2 === 0 && rest.every((c, k) => (k % 2 === 0) === isAxisLike(filled(c)))) {
    return chosen(rest.filter((_, k) => k % 2 === 0).map((c) => ({ x: c, ys: [c + 1] })))
  }
  const label = plainWords(labels[first]!)
  if (hints.x === undefined && label !== '' && !/^(?:x|abszisse|abscissa|abscisse|abscisa)$/.test(label)) {
    return open({
      code: 'axis-unknown',
      column: first,
      what: `the first column is headed "${labels[first]}", which names no axis that is known here`,
      remedy: 'say what it is with `reading: { x: … }`',
      settle: unitsByValue(filled(first)).map((x) => ({ x })),
    })
  }
  return chosen([{ x: first, ys: rest.filter((c) => c !== first) }])
}

const isAxisLike = (x: Float64Array): boolean => isMonotone(x) && unitsByValue(x).length > 0

/** The unit of an axis column. What a person says wins, with a warning where the file says otherwise. */
export const axisUnitOf = (
  label: string,
  around: Surroundings,
  x: Float64Array,
  hints: ReadingHints,
): Choice<AxisUnit> => {
  const note = around.pairs.find((pair) => factOf(pair.key) === 'axis')
  const own = axisWords(label)
  const words = own.units.length > 0 || own.quantity !== null || note === undefined ? own : axisWords(note.value)
  const said = [...new Set(words.units)]
  if (hints.x !== undefined) {
    const contradicts = said.length > 0 && !said.includes(hints.x)
    const what = `the file says ${said.join(', ')}, the configuration ${hints.x}, which was taken`
    const warnings = contradicts ? [{ code: 'hint-contradicts', what, remedy: 'check `reading: { x: … }`' }] : []
    return { kind: 'chosen', value: hints.x, warnings }
  }
  if (said.includes('angstrom') || said.length > 1) {
    const what = `the axis is headed "${label}", which is ${said.length > 1 ? 'two units' : 'no unit that is read here'}`
    return open({
      code: 'axis-unit',
      what,
      remedy: 'export it in nm or cm⁻¹',
      settle: said.filter((u) => u !== 'angstrom').map((u) => ({ x: u })),
    })
  }
  const unit = said[0]
  if (unit !== undefined && unit !== 'angstrom') return { kind: 'chosen', value: unit, warnings: [] }
  const candidates =
    words.quantity === 'wavelength'
      ? (['nm', 'um'] as const).filter((u) => canBe(x, u))
      : words.quantity === 'energy'
        ? (['eV'] as const).filter((u) => canBe(x, u))
        : unitsByValue(x)
  const single = candidates[0]
  if (candidates.length === 1 && single !== undefined) {
    const what = `no unit is written; values from ${x[0]} to ${x.at(-1)} were taken as ${single}`
    const warnings =
      words.quantity === null ? [{ code: 'axis-by-value', what, remedy: 'set `reading: { x: … }` to be sure' }] : []
    return { kind: 'chosen', value: single, warnings }
  }
  const what = `no unit is written, and values from ${x[0]} to ${x.at(-1)} may be ${candidates.length === 0 ? 'in none that is known here' : candidates.join(' or ')}`
  return open({
    code: 'axis-unit',
    what,
    remedy: 'say which with `reading: { x: … }`',
    settle: candidates.map((u) => ({ x: u })),
  })
}

export interface Ordinate {
  readonly column: number
  readonly kind: OrdinateKind
}

const hintFor = (words: OrdinateWords): OrdinateKind => {
  if (words.kind !== 'known') return 'absorbance'
  const { quantity, percent } = words
  return percent && (quantity === 'transmittance' || quantity === 'reflectance') ? `percent-${quantity}` : quantity
}

const quantityOfHint = (y: OrdinateKind): string => y.replace('percent-', '')

/** The ordinate columns to take and their kinds. */
export const ordinatesOf = (
  columns: readonly number[],
  labels: readonly string[],
  around: Surroundings,
  largestOf: (column: number) => number,
  smallestOf: (column: number) => number,
  hints: ReadingHints,
): Choice<readonly Ordinate[]> => {
  const words = new Map(columns.map((c) => [c, ordinateWords(labels[c]!)]))
  const known = columns.filter((c) => words.get(c)!.kind === 'known')
  const quantities = [...new Set(known.map((c) => (words.get(c) as { quantity: string }).quantity))]
  const wanted = hints.y === undefined ? undefined : quantityOfHint(hints.y)
  const blank = columns.filter((c) => words.get(c)!.kind === 'none')
  const strange = columns.filter((c) => ['other', 'several', 'side'].includes(words.get(c)!.kind))
  const matching = known.filter((c) => (words.get(c) as { quantity: string }).quantity === wanted)
  let take: readonly number[] = known.length > 0 ? known : blank
  if (wanted !== undefined && matching.length > 0) take = matching
  else if (wanted !== undefined && known.length > 1 && quantities.length > 1) take = blank
  else if (wanted !== undefined && columns.length === 1) take = columns
  else if (quantities.length > 1) {
    const what = `the columns hold ${quantities.join(' and ')}`
    return open({
      code: 'which-ordinate',
      what,
      remedy: 'say which to take with `reading: { y: … }`',
      settle: known.map((c) => ({ y: hintFor(words.get(c)!) })),
    })
  }
  if (take.length === 0) {
    const c = strange[0] ?? columns[0]
    const what =
      c === undefined
        ? 'there is no column beside the axis'
        : `the column headed "${labels[c]}" is no ordinate that can be fitted`
    return open({
      code: 'ordinate-unknown',
      ...(c === undefined ? {} : { column: c }),
      what,
      remedy: 'export absorbance, transmittance or reflectance',
    })
  }
  const warnings = columns
    .filter((c) => !take.includes(c))
    .map((c) => ({
      code: 'column-skipped',
      column: c,
      what: `column ${c + 1} ("${labels[c]}") is not read as a spectrum`,
      remedy: 'head it with what it holds if it is one',
    }))
  const noted = wanted === undefined ? noteOf(around) : null
  const ordinates: Ordinate[] = []
  for (const column of take) {
    const own = words.get(column)!
    const [large, small] = [largestOf(column), smallestOf(column)]
    if (hints.y !== undefined) {
      const said = own.kind === 'known' ? own.quantity : null
      if (said !== null && said !== wanted) {
        warnings.push({
          code: 'hint-contradicts',
          column,
          what: `the file says ${said}, the configuration ${hints.y}, which was taken`,
          remedy: 'check `reading: { y: … }`',
        })
      }
      const scale = ordinateKind(quantityOfHint(hints.y) as 'absorbance', hints.y.startsWith('percent-'), large)
      if (
        scale.kind === 'settled'
          ? scale.y !== hints.y
          : scale.readings.length === 0 || quantityOfHint(hints.y) === 'absorbance'
      ) {
        return open({
          code: 'ordinate-scale',
          column,
          what: `values up to ${large} cannot be ${hints.y}`,
          remedy: 'check `reading: { y: … }`',
          settle: scale.kind === 'settled' ? [{ y: scale.y }] : [],
        })
      }
      ordinates.push({ column, kind: hints.y })
      continue
    }
    const words1 = own.kind === 'known' ? own : noted
    if (words1 === null) {
      // a ratio of intensities does not fall below zero by more than noise: what does is absorbance
      if (small < -0.02 && large <= 6) {
        ordinates.push({ column, kind: 'absorbance' })
        warnings.push({
          code: 'ordinate-by-value',
          column,
          what: `no kind is written; values from ${small} to ${large} can only be absorbance`,
          remedy: 'set `reading: { y: absorbance }` to be sure',
        })
        continue
      }
      const readings: readonly OrdinateKind[] =
        large <= 1.5
          ? ['absorbance', 'transmittance']
          : large > 5
            ? ['percent-transmittance', 'percent-reflectance']
            : ['absorbance', 'percent-transmittance']
      return open({
        code: 'ordinate-unknown',
        column,
        what: `nothing says what the ordinate is, and values up to ${large} may be ${readings.join(' or ')}`,
        remedy: 'say which with `reading: { y: … }`',
        settle: readings.map((y) => ({ y })),
      })
    }
    const kind = ordinateKind(words1.quantity, words1.percent, large)
    if (kind.kind === 'open') {
      const how = kind.readings.length > 0 ? `may be ${kind.readings.join(' or ')}` : 'is impossible'
      return open({
        code: 'ordinate-scale',
        column,
        what: `${kind.why} ${how}`,
        remedy: 'say which with `reading: { y: … }`',
        settle: kind.readings.map((y) => ({ y })),
      })
    }
    ordinates.push({ column, kind: kind.y })
  }
  return { kind: 'chosen', value: ordinates, warnings }
}

/** The one kind of ordinate that the notes speak of: under a key for it, else anywhere; null where none or two are named. */
const noteOf = (around: Surroundings): Extract<ReturnType<typeof ordinateWords>, { kind: 'known' }> | null => {
  for (const pair of around.pairs) {
    const words = factOf(pair.key) === 'ordinate' ? ordinateWords(pair.value) : null
    if (words?.kind === 'known') return words
  }
  const found = around.notes
    .map(({ text }) => (text.length > 3 ? ordinateWords(text) : { kind: 'none' as const }))
    .filter((words) => words.kind === 'known')
  return new Set(found.map((words) => `${words.quantity}${words.percent}`)).size === 1 ? found[0]! : null
}
