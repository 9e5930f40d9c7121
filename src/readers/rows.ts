/** Rows of numbers: one pass over the characters of a line, without cutting it up. */
import { cellsOf, type Delimiter } from './cells.ts'
import { type DecimalMark, ordinateOfText, plainNumber } from './numbers.ts'

export interface Dialect {
  readonly delimiter: Delimiter
  readonly decimal: DecimalMark
}

/** Stands for an empty cell: no word and no number reads as this, and a missing value (NaN) is another thing. */
export const EMPTY = -Infinity

/**
 * The values of a row of data, or null where the line is none. In a row the first filled cell is a number, the others are numbers
 * or words for missing (NaN) or overflow (+Infinity), and at least two are filled; an ordinate left empty counts where a delimiter
 * shows its place.
 */
export const rowOf = (line: string, dialect: Dialect): readonly number[] | null => {
  const values: number[] = []
  const { delimiter, decimal } = dialect
  const blank = delimiter === ' '
  const stop = delimiter.charCodeAt(0)
  let filled = 0
  let i = 0
  for (;;) {
    while (i < line.length && isBlank(line.charCodeAt(i), stop)) i++
    if (blank && i >= line.length) break
    let end = i
    while (end < line.length && !ends(line.charCodeAt(end), stop)) end++
    let to = end
    while (to > i && line.charCodeAt(to - 1) === BLANK) to--
    if (to === i) values.push(EMPTY)
    else {
      const plain = plainNumber(line, i, to, decimal)
      const value = Number.isNaN(plain) ? ordinateOfText(line.slice(i, to).trim(), decimal) : plain
      if (value === null || (filled === 0 && !Number.isFinite(value))) return null
      filled++
      values.push(value)
    }
    if (!blank && end >= line.length) break
    i = blank ? end : end + 1
  }
  return isRow(values, filled, dialect) ? values : null
}

/** The same for a line whose cells are already apart. */
export const rowOfCells = (cells: readonly string[], dialect: Dialect): readonly number[] | null => {
  const values: number[] = []
  let filled = 0
  for (const cell of cells) {
    // thousands marks made of blanks need another delimiter
    if (dialect.delimiter === ' ' && cell.includes(' ')) return null
    const value = cell === '' ? EMPTY : ordinateOfText(cell, dialect.decimal)
    if (value === null || (filled === 0 && value !== EMPTY && !Number.isFinite(value))) return null
    if (value !== EMPTY) filled++
    values.push(value)
  }
  return isRow(values, filled, dialect) ? values : null
}

/** The row of any line, quoted or not. */
export const rowOfLine = (line: string, dialect: Dialect): readonly number[] | null =>
  line.includes('"') ? rowOfCells(cellsOf(line, dialect.delimiter) ?? [], dialect) : rowOf(line, dialect)

const isRow = (values: readonly number[], filled: number, { delimiter }: Dialect): boolean =>
  filled >= 2 || (filled === 1 && values.length >= 2 && delimiter !== ' ' && values[0] !== EMPTY)

const BLANK = 32
const TAB = 9
const NO_BREAK = 0xa0
const isBlank = (code: number, stop: number): boolean =>
  code === BLANK || code === NO_BREAK || (code === TAB && stop !== TAB)
const ends = (code: number, stop: number): boolean => code === stop || (stop === BLANK && code === TAB)
