/** Cuts a line into cells. Lines with quotes go through csv-parse, all in one call; plain ones are cut where the delimiter stands. */
import { parse } from 'csv-parse/sync'

export type Delimiter = ',' | ';' | '\t' | '|' | ' '

/** The cells of a line, trimmed; null where a quote is left open or closed before the end of its cell. */
export const cellsOf = (line: string, delimiter: Delimiter): readonly string[] | null =>
  line.includes('"') ? quotedCells([line], delimiter)[0]! : plainCells(line, delimiter)

const plainCells = (line: string, delimiter: Delimiter): readonly string[] => {
  const inner = line.trim()
  if (delimiter === ' ') return inner === '' ? [] : inner.split(/[ \t]+/)
  return line.split(delimiter).map((cell) => cell.trim())
}

/** Cells of lines that hold quotes, null for each whose quotes do not close. */
export const quotedCells = (lines: readonly string[], delimiter: Delimiter): readonly (readonly string[] | null)[] => {
  if (lines.length === 0) return []
  const half = lines.length >> 1
  // csv-parse builds an error for every record of another length than its first: a line from the middle goes ahead
  const text = [lines[half], ...lines].join('\n')
  const blank = delimiter === ' '
  try {
    const records: string[][] = parse(text, {
      delimiter: blank ? [' ', '\t'] : delimiter,
      from: 2,
      record_delimiter: '\n',
      relax_column_count: true,
      relax_quotes: true,
      trim: !blank && text.includes(' '),
    })
    if (records.length === lines.length)
      return blank ? records.map((cells) => cells.filter((cell) => cell !== '')) : records
  } catch {
    // some line is at fault
  }
  return lines.length === 1
    ? [null]
    : [...quotedCells(lines.slice(0, half), delimiter), ...quotedCells(lines.slice(half), delimiter)]
}

/** Where cell `index` of a line begins, from 1. */
export const columnAt = (line: string, delimiter: Delimiter, index: number): number => {
  let from = 0
  for (const [i, cell] of (cellsOf(line, delimiter) ?? []).entries()) {
    // a doubled quote is not found: then the end of the cell before is the place
    const at = Math.max(line.indexOf(cell, from), from)
    if (i === index) return at + 1
    from = at + cell.length
    if (delimiter !== ' ') from = Math.max(line.indexOf(delimiter, from) + 1, from)
  }
  return 1
}
