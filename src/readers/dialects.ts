/** Which dialects a delimited text could be written in, and the tables that they make of it. */
import { type Delimiter, type Dialect, type Table, tableUnder } from './table.ts'
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

/** What the settings or the first line say, else every delimiter with either decimal mark. */
export const dialectsFor = (hints: ReadingHints, declared: string | undefined): readonly Dialect[] => {
  const said = hints.delimiter ?? declared
  const delimiters =
    said === undefined ? ([';', '\t', ',', '|', ' '] as const) : [WORDS[said.toLowerCase()] ?? (said as Delimiter)]
  return delimiters.flatMap((delimiter) =>
    (['.', ','] as const).filter((d) => d === (hints.decimal ?? d)).map((decimal) => ({ delimiter, decimal })),
  )
}

/** The tables that explain the most lines: a dialect that leaves rows of numbers over is not the file's. */
export const readable = (lines: readonly Line[], dialects: readonly Dialect[]): readonly Table[] => {
  const tables = dialects
    .filter(({ delimiter }) => occurs(delimiter, lines))
    .map((dialect) => tableUnder(lines, dialect))
    .filter((table) => table !== null && table.columns >= 2) as Table[]
  const most = Math.max(0, ...tables.map((table) => table.rows.length))
  return tables.filter((table) => table.rows.length === most)
}

/** A delimiter that stands nowhere makes no table of two columns. */
const occurs = (delimiter: Delimiter, lines: readonly Line[]): boolean =>
  lines.some(({ text }) => (delimiter === ' ' ? /\S[ \t]+\S/.test(text) : text.includes(delimiter)))
