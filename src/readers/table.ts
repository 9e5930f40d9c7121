/** Finds the table of numbers in a text under one dialect: which lines are data, what stands above, below and between. */

import { type DecimalMark, numberOf, ordinateOfText } from './numbers.ts'
import type { Line } from './text.ts'

export type Delimiter = ',' | ';' | '\t' | '|' | ' '

export interface Dialect {
  readonly delimiter: Delimiter
  readonly decimal: DecimalMark
}

export interface Cell {
  readonly text: string
  readonly quoted: boolean
  /** From 1. */
  readonly column: number
}

export interface Row {
  readonly line: number
  readonly cells: readonly Cell[]
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
  readonly broken: {
    readonly line: number
    readonly column: number
    readonly code: string
    readonly what: string
  } | null
}

const COMMENT = /^\s*(?:#|!|%|\/\/|'|\*(?!\*))/
/** Whether a line is a comment, and what it says. */
export const commentText = (line: string): string | null => {
  const m = COMMENT.exec(line)
  return m
    ? line
        .slice(m[0].length)
        .replace(/^[#!%/'*]+/, '')
        .trim()
    : null
}

/** Cells of a line; quotes keep a delimiter and are doubled to stand for themselves. Null where a quote is left open. */
export const cellsOf = (line: string, delimiter: Delimiter): readonly Cell[] | null => {
  const cells: Cell[] = []
  const blank = delimiter === ' '
  let i = 0
  const skip = () => {
    while (i < line.length && (line[i] === ' ' || line[i] === '\u00a0' || (line[i] === '\t' && delimiter !== '\t'))) i++
  }
  for (;;) {
    skip()
    if (blank && i >= line.length) return cells
    const start = i
    if (line[i] === '"') {
      let text = ''
      i++
      for (;;) {
        const close = line.indexOf('"', i)
        if (close < 0) return null
        text += line.slice(i, close)
        i = close + 1
        if (line[i] !== '"') break
        text += '"'
        i++
      }
      skip()
      if (i < line.length && !blank && line[i] !== delimiter) return null
      cells.push({ text: text.trim(), quoted: true, column: start + 1 })
    } else {
      let end = i
      while (end < line.length && (blank ? line[end] !== ' ' && line[end] !== '\t' : line[end] !== delimiter)) end++
      cells.push({ text: line.slice(i, end).trim(), quoted: false, column: start + 1 })
      i = end
    }
    if (!blank) {
      if (i >= line.length) return cells
      i++
    }
  }
}

const isNumberCell = (cell: Cell, { delimiter, decimal }: Dialect): boolean =>
  // thousands marks made of blanks need another delimiter; a comma in a cell of a comma table needs quotes
  !(delimiter === ' ' && cell.text.includes(' ')) && numberOf(cell.text, decimal) !== null

const delimiterShows = (cells: readonly Cell[], { delimiter }: Dialect): boolean =>
  delimiter !== ' ' && cells[0]!.text !== ''

/** A row of data: its first filled cell is a number, the others numbers or words for missing or overflow, at least two filled. */
const isData = (cells: readonly Cell[], dialect: Dialect): boolean => {
  let filled = 0
  let numbers = 0
  for (const cell of cells) {
    if (cell.text === '') continue
    filled++
    if (isNumberCell(cell, dialect)) numbers++
    else if (filled === 1 || ordinateOfText(cell.text, dialect.decimal) === null) return false
  }
  // an ordinate left empty is missing, where a delimiter shows its place
  return numbers >= 1 && (filled >= 2 || (cells.length >= 2 && delimiterShows(cells, dialect)))
}

/** Begins as a number does, and is not `key: value`: were it read as a note, a damaged row would vanish without a word. */
const resemblesData = (text: string): boolean =>
  /^[\s",;|\t]*[+\-\u2212]?[.,]?\d/.test(text) ||
  /^[\s",;|\t]*[-+.,?\d\s;|]+$/.test(text) ||
  /\d\s*[,;\t|]\s*[+-]?[.,]?\d+(?:[.,]\d+)?\s*$/.test(text)

/** The table under this dialect, or null where no line is a row of data. */
export const tableUnder = (lines: readonly Line[], dialect: Dialect): Table | null => {
  const parsed: { line: Line; cells: readonly Cell[] | null; data: boolean }[] = []
  const comments: Line[] = []
  for (const line of lines) {
    if (line.text.trim() === '') continue
    const comment = commentText(line.text)
    if (comment !== null) {
      comments.push({ number: line.number, text: comment })
      continue
    }
    const cells = cellsOf(line.text, dialect.delimiter)
    parsed.push({ line, cells, data: cells !== null && isData(cells, dialect) })
  }
  // the table is the longest run of rows; a header may hold a line of numbers, rows never stand alone
  let first = -1
  let last = -1
  for (let i = 0; i < parsed.length; i++) {
    if (!parsed[i]!.data) continue
    let end = i
    while (end + 1 < parsed.length && parsed[end + 1]!.data) end++
    if (end - i > last - first || first < 0) [first, last] = [i, end]
    i = end
  }
  if (first < 0) return null
  const run = parsed.slice(first, last + 1)
  const columns = widthOf(run.map(({ cells }) => cells!))
  const outside = [...parsed.slice(0, first), ...parsed.slice(last + 1)]
  const broken = firstBreak(run, columns, dialect, parsed.slice(last + 1), parsed.slice(0, first))
  return {
    dialect,
    columns,
    rows: run.map(({ line, cells }) => ({ line: line.number, cells: cells! })),
    above: outside.filter(({ line }) => line.number < run[0]!.line.number).map(({ line }) => line),
    below: outside.filter(({ line }) => line.number > run[0]!.line.number).map(({ line }) => line),
    comments,
    unended: run.at(-1)!.line.number === lines.at(-1)?.number,
    broken,
  }
}

/** What most rows have of cells, empty ones at the end of every row not counted. */
const widthOf = (rows: readonly (readonly Cell[])[]): number => {
  const counts = new Map<number, number>()
  for (const cells of rows) counts.set(cells.length, (counts.get(cells.length) ?? 0) + 1)
  const [usual] = [...counts].reduce((a, b) => (b[1] > a[1] ? b : a))
  const filled = Math.max(
    ...rows
      .filter((cells) => cells.length === usual)
      .map((cells) => cells.findLastIndex(({ text }) => text !== '') + 1),
  )
  return Math.min(usual, Math.max(filled, 2))
}

type Parsed = { readonly line: Line; readonly cells: readonly Cell[] | null; readonly data: boolean }

const firstBreak = (
  run: readonly Parsed[],
  columns: number,
  dialect: Dialect,
  after: readonly Parsed[],
  before: readonly Parsed[],
): Table['broken'] => {
  for (const { line, cells } of run) {
    // a row may only be shorter where it would have been empty: paired columns of unequal length write their delimiters
    if (cells!.length < columns || cells!.findLastIndex((cell) => cell.text !== '') >= columns) {
      const what = `${cells!.length} cells where the table has ${columns}`
      return { line: line.number, column: line.text.length + 1, code: 'row-length', what }
    }
  }
  const suspects: readonly Parsed[] = [
    ...after,
    ...before.filter(({ cells, line }) => isLikeRow(cells, line, dialect, columns)),
  ]
  for (const { line, cells, data } of suspects) {
    if (data)
      return { line: line.number, column: 1, code: 'second-table', what: 'a row of numbers apart from the table' }
    if (!resemblesData(line.text)) continue
    if (cells === null)
      return {
        line: line.number,
        column: line.text.indexOf('"') + 1,
        code: 'open-quote',
        what: 'a quote is opened and not closed',
      }
    const bad = cells.find(
      (cell, i) =>
        (i === 0 ? numberOf(cell.text, dialect.decimal) : ordinateOfText(cell.text, dialect.decimal)) === null,
    )
    const [column, what] = bad
      ? [bad.column, `"${bad.text}" is no number`]
      : [1, `${cells.length} cells where the table has ${columns}`]
    return { line: line.number, column, code: bad ? 'not-a-number' : 'row-length', what }
  }
  return null
}

/** Above the table stand headings and notes; what has a row's width and begins with a number is a damaged row. */
const isLikeRow = (cells: readonly Cell[] | null, line: Line, dialect: Dialect, columns: number): boolean =>
  cells !== null &&
  cells.length === columns &&
  /^\s*"?[+\-\u2212]?[.,]?\d/.test(line.text) &&
  numberOf(cells[0]!.text, dialect.decimal) !== null
