/** Finds a matrix in a text under one dialect: a row of wavelengths, below it rows of spectra, each headed by a name or a time. */
import { canBe } from './axis.ts'
import { cellsOf, type Delimiter } from './cells.ts'
import { numberOf, ordinateOfText } from './numbers.ts'
import type { Dialect } from './rows.ts'
import { type Break, type Content, cellsOfQuoted, type QuotedCells } from './table.ts'
import type { Line } from './text.ts'
import type { AxisUnit, ReadingHints } from './types.ts'
import { axisWords } from './words.ts'

export interface MatrixRow extends Line {
  /** One text for each leading column. */
  readonly labels: readonly string[]
  /** NaN where missing or empty, +Infinity for an overflow word. */
  readonly values: Float64Array
}

export interface Matrix {
  readonly dialect: Dialect
  /** The line of wavelengths. */
  readonly head: Line
  /** Cells of that line before the first wavelength, one for each leading column, empty where nothing stands. */
  readonly headings: readonly string[]
  readonly x: Float64Array
  /** The unit that stands behind every wavelength (`400 nm`), or empty. */
  readonly unit: string
  readonly rows: readonly MatrixRow[]
  readonly above: readonly Line[]
  readonly below: readonly Line[]
  readonly comments: readonly Line[]
  readonly unended: boolean
  readonly broken: Break | null
}

/** Lines above this many are looked at for the row of wavelengths. */
const HEADER_LINES = 200
const FEWEST = 3

/** Every matrix that a dialect makes of the text; of dialects that explain fewer rows than another none. */
export const matricesIn = (content: Content, dialects: readonly Dialect[], hints: ReadingHints): readonly Matrix[] => {
  const quoted = new Map<Delimiter, QuotedCells>()
  const cells = (delimiter: Delimiter): QuotedCells => {
    if (!quoted.has(delimiter)) quoted.set(delimiter, cellsOfQuoted(content.lines, delimiter))
    return quoted.get(delimiter)!
  }
  const found = dialects
    .map((dialect) => matrixUnder(content, dialect, hints, () => cells(dialect.delimiter)))
    .filter((matrix) => matrix !== null)
  const most = Math.max(0, ...found.map(({ rows, x }) => rows.length * x.length))
  return found.filter(({ rows, x }) => rows.length * x.length === most)
}

const matrixUnder = (
  content: Content,
  dialect: Dialect,
  hints: ReadingHints,
  quoted: () => QuotedCells,
): Matrix | null => {
  const { lines } = content
  let rows = 0
  for (let i = 0; i < Math.min(lines.length - 1, HEADER_LINES) && rows < FEWEST; i++) {
    const { text } = lines[i]!
    if (!hasPieces(text, dialect.delimiter)) {
      if (BEGINS_WITH_NUMBER.test(text)) rows++
      continue
    }
    const cells = cellsOf(text, dialect.delimiter) ?? []
    const head = headOf(cells, dialect)
    const isAxis = head !== null && isPlausible(axisOf(content, i, head), hints)
    const matrix = isAxis ? matrixBelow(content, i, head, dialect, quoted()) : null
    if (matrix !== null) return matrix
    // after some rows that begin with a number no row of wavelengths will come
    if (numberOf(cells[0] ?? '', dialect.decimal) !== null) rows++
  }
  return null
}

const BEGINS_WITH_NUMBER = /^\s*["']?[+-]?[.,]?\d/

/** Whether a line falls into so many pieces as a row of wavelengths has at least. */
const hasPieces = (text: string, delimiter: Delimiter): boolean => {
  if (delimiter === ' ') return text.trim().split(/[ \t]+/, FEWEST).length >= FEWEST
  const first = text.indexOf(delimiter)
  return first >= 0 && text.indexOf(delimiter, first + 1) >= 0
}

/** What a row of wavelengths says of its axis. */
type Axis = Pick<Matrix, 'x' | 'headings' | 'unit' | 'above'>

const axisOf = ({ lines }: Content, at: number, head: Head): Axis => ({
  x: Float64Array.from(head.x, (value) => value ?? Number.NaN),
  headings: head.headings,
  unit: head.unit,
  above: lines.slice(0, at),
})

interface Head {
  readonly headings: readonly string[]
  readonly x: readonly (number | null)[]
  readonly unit: string
}

const AXIS_CELL = /^(.*\d[.,]?)\s*(nm|[µμu]m|cm\s?-?\^?\(?[-−⁻]?[1¹]\)?|1\/cm|eV)$/i

/** The leading headings and the wavelengths of a line that may be a row of wavelengths, or null. */
const headOf = (all: readonly string[], { decimal }: Dialect): Head | null => {
  const cells = all.slice(0, all.findLastIndex((cell) => cell !== '') + 1)
  const units = new Set<string>()
  const x = cells.map((cell) => {
    const own = AXIS_CELL.exec(cell)
    const value = numberOf(own ? own[1]!.trim() : cell, decimal)
    if (value !== null) units.add(own?.[2] ?? '')
    return value
  })
  const first = x.findIndex((value) => value !== null)
  const numbers = x.slice(first).filter((value) => value !== null)
  if (first < 0 || numbers.length < FEWEST || units.size !== 1) return null
  // one that is damaged is still known for what it is, and refused for the damage
  const whole = cells.length - first
  if (numbers.length < whole && (whole < 6 || numbers.length < 0.8 * whole)) return null
  return runsOneWay(numbers) ? { headings: cells.slice(0, first), x: x.slice(first), unit: [...units][0]! } : null
}

const runsOneWay = (x: readonly number[]): boolean => {
  let up = 0
  for (let i = 1; i < x.length; i++) up += Math.sign(x[i]! - x[i - 1]!)
  const steps = x.length - 1
  return Math.abs(up) === steps || (steps >= 5 && Math.abs(up) >= 0.5 * steps)
}

const isFull = (cells: readonly string[], from: number, columns: number, { decimal }: Dialect): boolean => {
  const last = cells.findLastIndex((cell) => cell !== '')
  if (cells.length < columns || last >= columns) return false
  let numbers = 0
  for (let c = from; c < columns; c++) {
    if (cells[c] === '') continue
    const value = ordinateOfText(cells[c]!, decimal)
    if (value === null) return false
    if (Number.isFinite(value)) numbers++
  }
  return numbers > 0
}

/** More than half of the cells are numbers: a row, or what damage has left of one. */
const resemblesRow = (cells: readonly string[], { decimal }: Dialect): boolean => {
  const numbers = cells.filter((cell) => numberOf(cell, decimal) !== null).length
  return numbers >= FEWEST && numbers > 0.5 * cells.length
}

const matrixBelow = (
  content: Content,
  at: number,
  head: Head,
  dialect: Dialect,
  quoted: QuotedCells,
): Matrix | null => {
  const { lines } = content
  const cellsAt = (i: number): readonly string[] => {
    const cells = quoted[i]
    return (cells === undefined ? cellsOf(lines[i]!.text, dialect.delimiter) : cells) ?? []
  }
  const next = cellsAt(at + 1)
  // a corner that is left out, as blanks leave it out: the rows have the cells that the head lacks
  const missing = next.length - head.x.length
  const lead = head.headings.length > 0 ? head.headings.length : Math.max(0, missing)
  if (lead > 4 || !resemblesRow(next.slice(Math.min(lead, 1)), dialect)) return null
  const columns = lead + head.x.length
  const rows: MatrixRow[] = []
  let broken: Break | null = null
  let end = at + 1
  for (; end < lines.length; end++) {
    const cells = cellsAt(end)
    if (!isFull(cells, lead, columns, dialect)) break
    const values = Float64Array.from(head.x, (_, c) => ordinateOfText(cells[lead + c]!, dialect.decimal)!)
    rows.push({ ...lines[end]!, labels: cells.slice(0, lead), values })
  }
  for (let i = end; i < lines.length && broken === null; i++) {
    const cells = cellsAt(i)
    if (resemblesRow(cells, dialect) || isFull(cells, lead, columns, dialect))
      broken = breakIn(lines[i]!, cells, lead, columns, dialect)
  }
  if (rows.length === 0 && broken === null) return null
  const damaged = head.x.indexOf(null)
  if (damaged >= 0 || head.headings.some((cell) => /^[+-]?[.,]?\d/.test(cell))) {
    const what = 'a cell among the wavelengths is no number'
    broken = { line: lines[at]!.number, column: 1, code: 'not-a-number', what }
  }
  return {
    dialect,
    head: lines[at]!,
    headings: Array.from({ length: lead }, (_, k) => head.headings[k] ?? ''),
    x: Float64Array.from(head.x, (value) => value ?? Number.NaN),
    unit: head.unit,
    rows,
    above: lines.slice(0, at),
    below: lines.slice(end),
    comments: content.comments,
    unended: lines[end - 1]!.number === content.end,
    broken,
  }
}

const breakIn = (
  { number, text }: Line,
  cells: readonly string[],
  lead: number,
  columns: number,
  { decimal }: Dialect,
): Break => {
  if (cells.length !== columns)
    return {
      line: number,
      column: text.length + 1,
      code: 'row-length',
      what: `${cells.length} cells where the row of wavelengths has ${columns}`,
    }
  const bad = cells.findIndex((cell, c) => c >= lead && ordinateOfText(cell, decimal) === null)
  return bad < 0
    ? { line: number, column: 1, code: 'second-table', what: 'a row of numbers apart from the table' }
    : { line: number, column: 1, code: 'not-a-number', what: `"${cells[bad]}" (cell ${bad + 1}) is no number` }
}

/** The words for the axis in the headings of a matrix: behind each wavelength, in the corner, or alone on a line above. */
export const axisWordsOf = ({ headings, unit, above }: Pick<Matrix, 'headings' | 'unit' | 'above'>): string => {
  if (unit !== '') return unit
  const speaks = (text: string) => axisWords(text).units.length > 0 || axisWords(text).quantity !== null
  const corner = headings.filter(speaks).join(' ')
  if (corner !== '') return corner
  const spanning = above.map(({ text }) => text.replace(/[;,|\t"]+/g, ' ').trim())
  return spanning.findLast((text) => !/\d{2}/.test(text) && text.length < 60 && speaks(text)) ?? ''
}

/**
 * Whether the row of numbers can be an axis: most values in the range of the unit that is said, else all but a few in the range where
 * a unit need not be said.
 */
const isPlausible = (matrix: Axis, hints: ReadingHints): boolean => {
  const { x } = matrix
  const said = hints.x ?? axisWords(axisWordsOf(matrix)).units[0]
  const units = said === undefined || said === 'angstrom' ? (['nm', 'cm^-1'] as const) : [said]
  return units.some((unit) => {
    const values = x.filter(
      (v) => Number.isNaN(v) || (canBe(Float64Array.of(v), unit) && (said !== undefined || isUsual(v, unit))),
    )
    return values.length >= (x.length < 6 ? x.length : 0.8 * x.length)
  })
}

const isUsual = (v: number, unit: AxisUnit): boolean => (unit === 'nm' ? v <= 1400 : v >= 3500)
