/** When each row of a matrix was measured: a time of its own, or the start that the file states and what has passed since. */
import type { Fault } from '../fault.ts'
import { elapsedOf, later, namesTime, secondsPerUnit } from './elapsed.ts'
import { type Facts, factsOf, type Pair } from './facts.ts'
import type { Matrix, MatrixRow } from './matrix.ts'
import { numberOf } from './numbers.ts'
import { timeOf } from './times.ts'
import type { WrittenTime } from './types.ts'
import { factOf, plainWords } from './words.ts'

/** The number in a cell under either decimal mark, or null. */
export const numberIn = (text: string): number | null => numberOf(text, '.') ?? numberOf(text, ',')

const isClock = (heading: string): boolean => ['date', 'time', 'datetime'].includes(factOf(heading) ?? '')

/** Whether a leading cell says when and not what. */
export const isMoment = (heading: string, label: string): boolean =>
  isClock(heading) || namesTime(heading) || elapsedOf(label) !== null || timeOf(label).kind === 'time'

/** Seconds since the start that a leading cell says, or null. */
const secondsOf = (heading: string, label: string): number | null => {
  const perUnit = secondsPerUnit(heading)
  const value = perUnit === null ? null : numberIn(label)
  return value === null ? elapsedOf(label) : value * perUnit!
}

/** The facts of one row: its leading cells under their headings, before what the file says of all rows. */
export const factsOfRow = (matrix: Matrix, row: MatrixRow, pairs: readonly Pair[], file: string): Facts => {
  const cells = matrix.headings.map((heading, k) => ({ heading, label: row.labels[k]! })).filter((c) => c.label !== '')
  const own = cells
    // a bare number under `Time` is no time of day
    .filter(({ heading, label }) => heading !== '' && !(isClock(heading) && numberIn(label) !== null))
    .map(({ heading, label }) => ({ key: heading, value: label, line: row.number }))
  const kinds = new Set(own.map(({ key }) => factOf(key)))
  const replaced = (key: string): boolean => {
    const fact = factOf(key)
    if (fact === 'datetime') return kinds.has('time') || kinds.has('date')
    return kinds.has('datetime') ? fact === 'date' || fact === 'time' : fact === 'time' && kinds.has('date')
  }
  const facts = factsOf([...own, ...pairs.filter(({ key }) => !replaced(key))], file)
  const header = Object.fromEntries(
    cells.map(({ heading, label }, k) => [plainWords(heading) || `column ${k + 1}`, label]),
  )
  return { ...facts, header: { ...facts.header, ...header } }
}

/** A time for each row, null where none can be said, with a warning. `shared` are the facts that hold for all rows. */
export const timesOf = (
  { headings, rows }: Matrix,
  shared: Facts,
  facts: readonly Facts[],
  file: string,
): { readonly value: readonly (WrittenTime | null)[]; readonly warnings: readonly Fault[] } => {
  const warnings: Fault[] = []
  const unclear = (line: number, what: string, remedy: string): null => {
    warnings.push({ code: 'time-unclear', place: { at: file, line }, what, remedy })
    return null
  }
  const clocks = headings.some(isClock)
  const value = rows.map(({ labels, number }, r) => {
    for (const [k, heading] of headings.entries()) {
      const label = labels[k]!
      const seconds = secondsOf(heading, label)
      const stamp = timeOf(label)
      if (seconds !== null)
        return shared.time === null
          ? unclear(
              number,
              `"${label}" counts from a start that the file does not state`,
              'state the start: `Date: 2026-03-02T09:00:00+01:00`',
            )
          : later(shared.time, seconds)
      if (stamp.kind === 'time') return stamp.time
      if (namesTime(heading) && numberIn(label) !== null)
        return unclear(
          number,
          `"${label}" under "${heading}" has no unit`,
          'head the column with its unit, such as Time (s)',
        )
    }
    const own = facts[r]!.time
    return clocks && own === null && shared.time !== null
      ? unclear(number, 'the time of this row cannot be read', 'write it as 2026-03-02T09:00:00+01:00')
      : own
  })
  // a clock that turns back has passed midnight, and which day a row belongs to is open
  const day =
    headings.some((heading) => factOf(heading) === 'time') &&
    !headings.some((h) => ['date', 'datetime'].includes(factOf(h) ?? ''))
  const back = day
    ? value.findIndex((time, r) => r > 0 && time !== null && time.local < (value[r - 1]?.local ?? ''))
    : -1
  if (back < 0) return { value, warnings }
  unclear(
    rows[back]!.number,
    'the clock turns back here: which day the rows belong to is open',
    'write the date in every row',
  )
  return { value: value.map(() => null), warnings }
}
