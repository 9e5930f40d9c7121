/** Which dialects a delimited text could be written in, and the tables that they make of it. */
import type { Delimiter } from './cells.ts'
import type { Dialect } from './rows.ts'
import { type Content, cellsOfQuoted, type Table, tableUnder } from './table.ts'
import type { Line } from './text.ts'
import type { ReadingHints } from './types.ts'

/** A first line such as `sep=;` names the delimiter and is no part of the table. */
export const withoutDeclaration = (
  lines: readonly Line[],
): { readonly lines: readonly Line[]; readonly declared: string | undefined } => {
  const m = /^\s*"?(?:sep|delimiter)\s*=\s*(.|\\t|tab)"?\s*$/i.exec(lines[0]?.text ?? '')
  return m ? { lines: lines.slice(1), declared: m[1] } : { lines, declared: undefined }
}

const WORDS: Readonly<Record<string, Delimiter>> = {
  tab: '\t',
  '\\t': '\t',
  comma: ',',
  semicolon: ';',
  blank: ' ',
  blanks: ' ',
  space: ' ',
  bar: '|',
}

const MARKS = ['.', ','] as const

/** What the settings or the first line say, else every delimiter with either decimal mark. */
export const dialectsFor = (hints: ReadingHints, declared: string | undefined): readonly Dialect[] => {
  const said = hints.delimiter ?? declared
  const delimiters =
    said === undefined ? ([';', '\t', ',', '|', ' '] as const) : [WORDS[said.toLowerCase()] ?? (said as Delimiter)]
  return delimiters.flatMap((delimiter) =>
    MARKS.filter((d) => d === (hints.decimal ?? d)).map((decimal) => ({ delimiter, decimal })),
  )
}

/** The tables that explain the most lines: a dialect that leaves rows of numbers over is not the file's. */
export const readable = (content: Content, dialects: readonly Dialect[]): readonly Table[] => {
  const counts = countsOf(content.text)
  const count = (mark: string) => counts[mark.charCodeAt(0)]!
  const isRare = (seen: number) => seen < content.lines.length / 2
  const points = count('.') >= count(',')
  const delimiters = [...new Set(dialects.map(({ delimiter }) => delimiter))]
    .map((delimiter) => ({ delimiter, seen: count(delimiter) + (delimiter === ' ' ? count('\t') : 0) }))
    // what stands in most lines goes first, so that the others are soon given up
    .sort((a, b) => Number(isRare(a.seen)) - Number(isRare(b.seen)))
  const tables: Table[] = []
  let most = 1
  for (const { delimiter, seen } of delimiters) {
    if (seen < most) continue
    const cells = cellsOfQuoted(content.lines, delimiter)
    const marks = points || delimiter === ',' ? MARKS : MARKS.toReversed()
    for (const decimal of marks.filter((mark) =>
      dialects.some((d) => d.delimiter === delimiter && d.decimal === mark),
    )) {
      const table = tableUnder(content, { delimiter, decimal }, cells, most)
      if (table === null || table.columns < 2) continue
      most = Math.max(most, table.rows.length)
      tables.push(table)
    }
  }
  return tables.filter((table) => table.rows.length === most)
}

/** How often each character of ASCII stands in a text. */
const countsOf = (text: string): Uint32Array => {
  const counts = new Uint32Array(128)
  for (let i = 0; i < text.length; i++) {
    const code = text.charCodeAt(i)
    if (code < 128) counts[code]!++
  }
  return counts
}
