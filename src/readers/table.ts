/** Finds the table of numbers in a text under one dialect: which lines are data, what stands above, below and between. */

import { cellsOf, columnAt, type Delimiter, quotedCells } from './cells.ts'
import { numberOf, ordinateOfText } from './numbers.ts'
import { type Dialect, EMPTY, rowOf, rowOfCells, rowOfLine } from './rows.ts'
import type { Line } from './text.ts'

export interface Row extends Line {
  /** NaN where missing, +Infinity for an overflow word, `EMPTY` where nothing stands. */
  readonly values: readonly number[]
}

export interface Table {
  readonly dialect: Dialect
  readonly columns: number
  readonly rows: readonly Row[]
  /** Lines above the first row and below the last, blank ones left out. */
  readonly above: readonly Line[]
  readonly below: readonly Line[]
  readonly comments: readonly Line[]
  /** Whether the last row is the last line and has no line end. */
  readonly unended: boolean
  /** The first thing that breaks the table. */
  readonly broken: Break | null
}

export interface Break {
  readonly line: number
  readonly column: number
  readonly code: string
  readonly what: string
}

/** Lines that say something, comments apart. */
export interface Content {
  /** The whole text. */
  readonly text: string
  readonly lines: readonly Line[]
  readonly comments: readonly Line[]
  /** Number of the last line of the file. */
  readonly end: number
}

const COMMENT = /^\s*(?:#|!|%|\/\/|'|\*(?!\*))/

/** What a comment line says. */
const commentOf = (line: string): string =>
  line
    .replace(COMMENT, '')
    .replace(/^[#!%/'*]+/, '')
    .trim()

/** Sorts lines into content and comments; blank ones are left out. */
export const contentOf = (text: string, all: readonly Line[]): Content => {
  const lines: Line[] = []
  const comments: Line[] = []
  for (const line of all) {
    const first = line.text.charCodeAt(0)
    // a digit, a letter or a quote begins neither a comment nor a blank line
    if ((first >= 48 && first < 127) || first === 34) lines.push(line)
    else if (COMMENT.test(line.text)) comments.push({ number: line.number, text: commentOf(line.text) })
    else if (/\S/.test(line.text)) lines.push(line)
  }
  return { text, lines, comments, end: all.at(-1)?.number ?? 0 }
}

/** For each line that holds quotes its cells, null where a quote is left open. */
export type QuotedCells = readonly (readonly string[] | null | undefined)[]

/** Cuts up the lines that hold quotes, once for both decimal marks. */
export const cellsOfQuoted = (lines: readonly Line[], delimiter: Delimiter): QuotedCells => {
  const quoted = lines.filter(({ text }) => text.includes('"'))
  if (quoted.length === 0) return []
  const cells = quotedCells(
    quoted.map(({ text }) => text),
    delimiter,
  )
  let next = 0
  return lines.map((line) => (line === quoted[next] ? cells[next++] : undefined))
}

/** Begins as a number does, and is not `key: value`: were it read as a note, a damaged row would vanish without a word. */
const resemblesData = (text: string): boolean =>
  /^[\s",;|\t]*[+\-\u2212]?[.,]?\d/.test(text) ||
  /^[\s",;|\t]*[-+.,?\d\s;|]+$/.test(text) ||
  /\d\s*[,;\t|]\s*[+-]?[.,]?\d+(?:[.,]\d+)?\s*$/.test(text)

/** The table under this dialect, or null where fewer than `fewest` lines (or none) are rows of data. */
export const tableUnder = (content: Content, dialect: Dialect, quoted: QuotedCells, fewest: number): Table | null => {
  const { lines } = content
  const rows: (readonly number[] | null)[] = []
  let spare = lines.length - fewest
  for (let i = 0; i < lines.length; i++) {
    const cells = quoted[i]
    const values = cells === undefined ? rowOf(lines[i]!.text, dialect) : rowOfCells(cells ?? [], dialect)
    rows.push(values)
    if (values === null && --spare < 0) return null
  }
  const [first, end] = longestRun(rows)
  if (end === first) return null
  const run = lines.slice(first, end).map(({ number, text }, i) => ({ number, text, values: rows[first + i]! }))
  const columns = widthOf(run)
  const [above, below] = [lines.slice(0, first), lines.slice(end)]
  return {
    dialect,
    columns,
    rows: run,
    above,
    below,
    comments: content.comments,
    unended: run.at(-1)!.number === content.end,
    broken: firstBreak(run, columns, dialect, above, below),
  }
}

/** The table is the longest run of rows; a header may hold a line of numbers, rows never stand alone. */
const longestRun = (rows: readonly (readonly number[] | null)[]): readonly [first: number, end: number] => {
  let best: readonly [number, number] = [0, 0]
  for (let i = 0; i < rows.length; i++) {
    let end = i
    while (end < rows.length && rows[end] !== null) end++
    if (end - i > best[1] - best[0]) best = [i, end]
    i = end
  }
  return best
}

const filledOf = (values: readonly number[]): number => values.findLastIndex((v) => v !== EMPTY) + 1

/** What most rows have of cells, empty ones at the end of every row not counted. */
const widthOf = (rows: readonly Row[]): number => {
  const counts = new Map<number, number>()
  for (const { values } of rows) counts.set(values.length, (counts.get(values.length) ?? 0) + 1)
  const [usual] = [...counts].reduce((a, b) => (b[1] > a[1] ? b : a))
  let filled = 0
  for (const { values } of rows) {
    if (filled === usual) break
    if (values.length === usual) filled = Math.max(filled, filledOf(values))
  }
  return Math.min(usual, Math.max(filled, 2))
}

const firstBreak = (
  run: readonly Row[],
  columns: number,
  dialect: Dialect,
  above: readonly Line[],
  below: readonly Line[],
): Break | null => {
  for (const { number: line, text, values } of run) {
    // a row may only be shorter where it would have been empty: paired columns of unequal length write their delimiters
    if (values.length < columns || (values.length > columns && filledOf(values) > columns)) {
      const what = `${values.length} cells where the table has ${columns}`
      return { line, column: text.length + 1, code: 'row-length', what }
    }
  }
  for (const line of [...below, ...above.filter(({ text }) => isLikeRow(text, dialect, columns))]) {
    const { number, text } = line
    if (rowOfLine(text, dialect) !== null)
      return { line: number, column: 1, code: 'second-table', what: 'a row of numbers apart from the table' }
    if (!resemblesData(text)) continue
    const cells = cellsOf(text, dialect.delimiter)
    if (cells === null) {
      const what = 'a quote is opened and not closed'
      return { line: number, column: text.indexOf('"') + 1, code: 'open-quote', what }
    }
    const bad = cells.findIndex(
      (cell, i) => (i === 0 ? numberOf(cell, dialect.decimal) : ordinateOfText(cell, dialect.decimal)) === null,
    )
    return bad < 0
      ? { line: number, column: 1, code: 'row-length', what: `${cells.length} cells where the table has ${columns}` }
      : {
          line: number,
          column: columnAt(text, dialect.delimiter, bad),
          code: 'not-a-number',
          what: `"${cells[bad]}" is no number`,
        }
  }
  return null
}

/** Above the table stand headings and notes; what has a row's width and begins with a number is a damaged row. */
const isLikeRow = (text: string, { delimiter, decimal }: Dialect, columns: number): boolean => {
  if (!/^\s*"?[+\-\u2212]?[.,]?\d/.test(text)) return false
  const cells = cellsOf(text, delimiter)
  return cells !== null && cells.length === columns && numberOf(cells[0]!, decimal) !== null
}
