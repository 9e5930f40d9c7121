/** What stands around a table: headings of its columns, and `key: value` notes. */
import { cellsOf, type Delimiter } from './cells.ts'
import type { Pair } from './facts.ts'
import type { Table } from './table.ts'
import type { Line } from './text.ts'
import { axisWords, factOf, ordinateWords } from './words.ts'

export interface Surroundings {
  /** One text a column, empty where there is no heading. */
  readonly labels: readonly string[]
  readonly pairs: readonly Pair[]
  /** Everything in words that is no heading, to look for the kind of ordinate. */
  readonly notes: readonly Line[]
  /** Whether there is a line of headings that has a text for every column. */
  readonly headed: boolean
}

const namesSomething = (cells: readonly string[]): boolean =>
  cells.some((cell) => {
    const axis = axisWords(cell)
    return axis.units.length > 0 || axis.quantity !== null || ordinateWords(cell).kind === 'known'
  })

const trimmed = (cells: readonly string[]): readonly string[] =>
  cells.slice(0, cells.findLastIndex((cell) => cell !== '') + 1)

/** Ways in which a heading may be cut up: as the data, by runs of blanks, by another delimiter, or between two names. */
const splits = (line: string, delimiter: Delimiter, columns: number): readonly string[] | null => {
  const as = (d: Delimiter) => trimmed(cellsOf(line, d) ?? [])
  const own = as(delimiter)
  if (own.length === columns) return own
  const raw = cellsOf(line, delimiter) ?? []
  if (raw.length === columns) return raw
  const wide = line.trim().split(/\s{2,}|\t/)
  if (wide.length === columns && namesSomething(wide)) return wide
  for (const other of ['\t', ';', ',', '|'] as const) {
    const cells = as(other)
    if (cells.length === columns && namesSomething(cells)) return cells
  }
  const words = line.trim().split(/[\s,;|]+/)
  for (let k = 1; columns === 2 && words.length <= 8 && k < words.length; k++) {
    const [left, right] = [words.slice(0, k).join(' '), words.slice(k).join(' ')]
    const axis = axisWords(left)
    if (
      (axis.units.length > 0 || axis.quantity) &&
      ordinateWords(right).kind === 'known' &&
      axisWords(right).units.length === 0
    )
      return [left, right]
  }
  return null
}

/** A date, a time, a length or a temperature always holds a digit: `Time;Absorbance` is a line of headings, `Time;10:00` a fact. */
const isFact = (cells: readonly string[]): boolean => {
  const [first, second] = [cells[0]!, cells[1] ?? '']
  if (/[:=]\s*$/.test(first) || /^[^:=;]{1,40}[:=]\s*\S/.test(first)) return true
  const fact = cells.length === 2 ? factOf(first) : null
  if (fact === null || fact === 'axis' || fact === 'ordinate' || ordinateWords(second).kind === 'known') return false
  return fact === 'sample' || fact === 'title' || fact === 'medium' || /\d/.test(second)
}

/** Splits what stands around a table into headings, notes and pairs. */
export const surroundingsOf = (table: Table): Surroundings => {
  const { delimiter } = table.dialect
  const headings: (readonly string[])[] = []
  let taken = table.above.length
  while (taken > 0 && headings.length < 3) {
    const cells = splits(table.above[taken - 1]!.text, delimiter, table.columns)
    if (cells === null || isFact(cells)) break
    headings.unshift(cells)
    taken--
  }
  const comments = [...table.comments]
  const last = comments.filter(({ number }) => number < table.rows[0]!.number).at(-1)
  if (headings.length === 0 && last) {
    const cells = splits(last.text, delimiter, table.columns)
    if (cells !== null && namesSomething(cells) && !isFact(cells)) {
      headings.push(cells)
      comments.splice(comments.indexOf(last), 1)
    }
  }
  const notes = [...table.above.slice(0, taken), ...comments, ...table.below]
  const labels = Array.from({ length: table.columns }, (_, c) =>
    headings
      .map((row) => row[c] ?? '')
      .join(' ')
      .trim(),
  )
  return {
    labels,
    pairs: notes.flatMap((line) => pairsOf(line, delimiter)),
    notes,
    headed: labels.every((label) => label !== ''),
  }
}

const PATH_IN_WORDS = /(\d+(?:[.,]\d+)?\s*(?:mm|cm))\s+(?:path|cell|cuvette|kuvette|schichtdicke|cuve|cubeta|trajet)/i

/** The facts a line of notes states; mostly one. */
export const pairsOf = ({ number, text }: Line, delimiter: Delimiter): readonly Pair[] => {
  const pairs: Pair[] = []
  const add = (key: string, value: string) => pairs.push({ key: key.trim(), value: value.trim(), line: number })
  const cells = delimiter === ' ' ? [] : trimmed(cellsOf(text, delimiter) ?? [])
  const key = cells[0]?.replace(/\s*[:=]\s*$/, '')
  const marked = /^\s*"?([^:=]{1,48}?)"?\s*[:=]\s*"?(.*?)"?\s*$/.exec(text.replace(/[;,\t|\s]+$/, ''))
  const spoken = /^\s*(\p{L}+(?: \p{L}+)?)\s+(\d{4}-\d{2}-\d{2}[T ].*)$/u.exec(text)
  if (key !== undefined && cells.length >= 2 && factOf(key) !== null)
    add(key, cells.slice(1).join(delimiter === '\t' ? ' ' : delimiter))
  else if (spoken && factOf(spoken[1]!) === 'datetime') add(spoken[1]!, spoken[2]!)
  else if (marked) add(marked[1]!, marked[2]!)
  else if (key !== undefined && cells.length === 2) add(key, cells[1]!)
  const path = PATH_IN_WORDS.exec(text)
  if (path && !pairs.some((pair) => factOf(pair.key) === 'path')) add('path', path[1]!)
  return pairs
}
