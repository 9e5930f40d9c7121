/**
 * Delimited text. Every dialect that could be meant is tried; a file is read when exactly one reading makes sense as a spectrum, or
 * when all that do give the same numbers. Otherwise it is refused, with the readings named and the YAML that settles it.
 */
import type { Fault, Place } from '../fault.ts'
import { axisFault, gapWarnings } from './axis.ts'
import { cellsOf, columnAt, type Delimiter } from './cells.ts'
import { axisUnitOf, type Complaint, type Group, groupColumns, ordinatesOf } from './columns.ts'
import { dialectsFor, readable, withoutDeclaration } from './dialects.ts'
import { factsOf } from './facts.ts'
import { type Surroundings, surroundingsOf } from './headings.ts'
import { EMPTY } from './rows.ts'
import { sampleOfLabel } from './sample.ts'
import { settleYaml } from './settle.ts'
import { contentOf, type Table } from './table.ts'
import { decodeText, linesOf } from './text.ts'
import type { RawSpectrum, Reader, Reading, ReadingHints } from './types.ts'

const FORMAT = 'delimited text'
const NAMES: Readonly<Record<Delimiter, string>> = {
  ',': 'comma',
  ';': 'semicolon',
  '\t': 'tab',
  '|': 'bar',
  ' ': 'blanks',
}

type Attempt =
  | {
      readonly kind: 'spectra'
      readonly table: Table
      readonly spectra: readonly RawSpectrum[]
      readonly warnings: readonly Fault[]
    }
  | {
      readonly kind: 'faulty'
      readonly table: Table
      readonly faults: readonly [Fault, ...Fault[]]
      readonly settle: readonly ReadingHints[]
    }

/** Reads tables of numbers written as text. */
export const delimitedText: Reader = {
  format: FORMAT,
  confidence: (bytes) => {
    const decoded = decodeText(bytes)
    if (decoded.kind === 'binary' || /^\s*(?:##|<\?xml|<[A-Za-z])/.test(decoded.text)) return 0
    return /\d[^\n\r]*[,;\t |][^\n\r]*\d/.test(decoded.text) ? 0.6 : 0.1
  },
  read: (bytes, file, hints) => {
    const decoded = decodeText(bytes)
    if (decoded.kind === 'binary')
      return refusal(file, {
        code: 'not-text',
        what: `this is no text: ${decoded.why}`,
        remedy: 'export the spectrum as text',
      })
    const { lines, declared } = withoutDeclaration(linesOf(decoded.text))
    const attempts = readable(contentOf(decoded.text, lines), dialectsFor(hints, declared)).map((table) =>
      attemptOn(table, file, hints),
    )
    const good = distinct(attempts.filter((attempt) => attempt.kind === 'spectra'))
    const [only, second] = good
    if (only && !second) {
      const { delimiter, decimal } = only.table.dialect
      const dialect = `${NAMES[delimiter]}-separated, decimal ${decimal === '.' ? 'point' : 'comma'}, ${decoded.encoding}, ${only.table.columns} columns`
      return { kind: 'read', format: FORMAT, dialect, spectra: only.spectra, warnings: only.warnings }
    }
    if (only && second) return ambiguous(good, file)
    const failed = attempts.find((attempt) => attempt.kind === 'faulty')
    if (!failed)
      return refusal(file, {
        code: 'no-table',
        what: 'there is no table of numbers in it',
        remedy: 'export the spectrum as columns of numbers, or set `reading: { delimiter: …, decimal: … }`',
      })
    const { dialect } = failed.table
    return {
      kind: 'refused',
      format: FORMAT,
      faults: failed.faults,
      settle: failed.settle.map((hint) => settleYaml({ ...dialect, ...hint })),
      spectra: [],
    }
  },
}

const refusal = (file: string, { code, what, remedy }: Complaint): Reading => ({
  kind: 'refused',
  format: FORMAT,
  faults: [{ code, place: { at: file }, what, remedy }],
  settle: [],
  spectra: [],
})

const ambiguous = (attempts: readonly Extract<Attempt, { kind: 'spectra' }>[], file: string): Reading => {
  const say = ({ table, spectra }: (typeof attempts)[number]) =>
    `${NAMES[table.dialect.delimiter]} with decimal ${table.dialect.decimal === '.' ? 'point' : 'comma'} (first point ${spectra[0]!.x[0]}, ${spectra[0]!.y[0]})`
  const what = `two readings are possible: ${attempts.slice(0, 2).map(say).join(', or ')}`
  const fault = {
    code: 'ambiguous-dialect',
    place: { at: file, line: attempts[0]!.table.rows[0]!.number },
    what,
    remedy: 'say which with `reading: { delimiter: …, decimal: … }`',
  }
  return {
    kind: 'refused',
    format: FORMAT,
    faults: [fault],
    settle: attempts.map(({ table }) => settleYaml(table.dialect)),
    spectra: [],
  }
}

/** One attempt of each set that gives the same numbers. */
const distinct = (attempts: readonly Extract<Attempt, { kind: 'spectra' }>[]): typeof attempts =>
  attempts.filter((attempt, i) => !attempts.slice(0, i).some((earlier) => isSame(earlier.spectra, attempt.spectra)))

const isSame = (a: readonly RawSpectrum[], b: readonly RawSpectrum[]): boolean =>
  a.length === b.length &&
  a.every((one, k) => {
    const other = b[k]!
    return one.xUnit === other.xUnit && one.yKind === other.yKind && equal(one.x, other.x) && equal(one.y, other.y)
  })

const equal = (a: Float64Array, b: Float64Array): boolean =>
  a.length === b.length && a.every((v, i) => Object.is(v, b[i]))

const attemptOn = (table: Table, file: string, hints: ReadingHints): Attempt => {
  const faulty = (complaint: Complaint, line: number): Attempt => {
    const column = complaint.column === undefined ? undefined : placeIn(table, 0, complaint.column, file).column
    const fault: Fault = {
      code: complaint.code,
      place: { at: file, line, ...(column === undefined ? {} : { column }) },
      what: complaint.what,
      remedy: complaint.remedy,
    }
    return { kind: 'faulty', table, faults: [fault], settle: complaint.settle ?? [] }
  }
  const top = table.rows[0]!.number
  if (table.broken) {
    const { line, column, code, what } = table.broken
    const fault: Fault = {
      code,
      place: { at: file, line, column },
      what,
      remedy: 'mend or export the file again; a table must be whole',
    }
    return { kind: 'faulty', table, faults: [fault], settle: [] }
  }
  const around = surroundingsOf(table)
  const doubtful = commaTwice(table, around) ?? damagedHeading(around)
  if (doubtful) return faulty(doubtful, top)
  const columns = Array.from({ length: table.columns }, (_, c) => columnOf(table, c))
  const groups = groupColumns(around.labels, (c) => columns[c]!, hints)
  if (groups.kind === 'open') return faulty(groups.complaint, top)
  const facts = factsOf(around.pairs, file)
  const warnings: Fault[] = [...facts.warnings]
  const spectra: RawSpectrum[] = []
  for (const group of groups.value) {
    const x = columns[group.x]!
    const hole = holeIn(table, group, x, file)
    if (hole) return { kind: 'faulty', table, faults: [hole], settle: [] }
    const unit = axisUnitOf(around.labels[group.x]!, around, x, hints)
    if (unit.kind === 'open') return faulty(unit.complaint, top)
    const ordinates = ordinatesOf(
      group.ys,
      around.labels,
      around,
      (c) => extreme(columns[c]!, 1),
      (c) => extreme(columns[c]!, -1),
      hints,
    )
    if (ordinates.kind === 'open') return faulty(ordinates.complaint, top)
    for (const { code, what, remedy } of [...unit.warnings, ...ordinates.warnings])
      warnings.push({ code, place: { at: file, line: top }, what, remedy })
    const placeOf = (i: number) => placeIn(table, i, group.x, file)
    for (const { column, kind } of ordinates.value) {
      const y = padded(columns[column]!, x.length)
      const fault = axisFault(x, y, unit.value, placeOf) ?? cutShort(table, group.x, column, file)
      if (fault) return { kind: 'faulty', table, faults: [fault], settle: [] }
      const own = sampleOfLabel(around.labels[column]!, groups.value.length * ordinates.value.length > 1)
      spectra.push({
        index: spectra.length,
        x,
        y,
        xUnit: unit.value,
        medium: unit.value === 'nm' || unit.value === 'um' ? (hints.medium ?? facts.medium) : facts.medium,
        yKind: kind,
        sample: own ?? facts.sample,
        title: facts.title,
        time: facts.time,
        pathMm: facts.pathMm,
        temperatureC: facts.temperatureC,
        concentrationMolPerL: facts.concentrationMolPerL,
        header: facts.header,
        warnings: gapWarnings(x, unit.value, placeOf),
      })
    }
  }
  return { kind: 'spectra', table, spectra, warnings }
}

/** The largest (sign 1) or smallest (sign −1) finite value, 0 where there is none. */
const extreme = (values: Float64Array, sign: 1 | -1): number => {
  let most = -Infinity
  for (const v of values) if (Number.isFinite(v) && v * sign > most) most = v * sign
  return most === -Infinity ? 0 : most * sign
}

const placeIn = (table: Table, row: number, column: number, file: string): Place => {
  const { number, text } = table.rows[row] ?? table.rows[0]!
  return { at: file, line: number, column: columnAt(text, table.dialect.delimiter, column) }
}

/** The numbers of a column down to its last filled cell; NaN where missing, Infinity for an overflow word. */
const columnOf = ({ rows }: Table, column: number): Float64Array => {
  const out = new Float64Array(rows.findLastIndex(({ values }) => values[column] !== EMPTY) + 1)
  for (let i = 0; i < out.length; i++) {
    const value = rows[i]!.values[column]!
    out[i] = value === EMPTY ? Number.NaN : value
  }
  return out
}

const padded = (y: Float64Array, length: number): Float64Array => {
  if (y.length >= length) return y
  const out = new Float64Array(length).fill(Number.NaN)
  out.set(y)
  return out
}

/** An ordinate without its abscissa, or an abscissa that is no number. */
const holeIn = (table: Table, group: Group, x: Float64Array, file: string): Fault | null => {
  const hole = x.findIndex((v) => !Number.isFinite(v))
  const beyond = table.rows.findIndex((row, r) => r >= x.length && group.ys.some((c) => row.values[c] !== EMPTY))
  const at = hole >= 0 ? hole : beyond
  if (at < 0) return null
  const text = textIn(table, at, group.x)
  return {
    code: 'axis-hole',
    place: placeIn(table, at, group.x, file),
    what: `the axis has no number here ("${text}")`,
    remedy: 'every ordinate needs its abscissa',
  }
}

const textIn = ({ rows, dialect }: Table, row: number, column: number): string =>
  cellsOf(rows.at(row)!.text, dialect.delimiter)?.[column] ?? ''

/** A comma that may be both: whole numbers between commas, with nothing to say how many columns there are. */
const commaTwice = (table: Table, around: Surroundings): Complaint | null => {
  if (table.dialect.delimiter !== ',' || around.headed) return null
  if (!table.rows.every(({ text }) => /^[\s\d,+-]*$/.test(text))) return null
  const what =
    'the comma may be delimiter or decimal mark: all cells are whole numbers, and no headings count the columns'
  return { code: 'ambiguous-comma', what, remedy: 'export with another delimiter, or with a heading for each column' }
}

/** A heading with a number where the axis stands is a damaged row or a row of wavelengths. */
const damagedHeading = (around: Surroundings): Complaint | null => {
  const numeric = around.labels.filter((label) => /^[+-]?[\d.,]+(?:[eE][+-]?\d+)?$/.test(label)).length
  const first = around.labels[0]!
  if (numeric === 0 || (numeric < around.labels.length - 1 && !/\d.*[^\d\s.,eE+-]|[^\d\s.,eE+-].*\d/.test(first)))
    return null
  if (/[a-zA-Zλ]{2}/.test(first) && !/^(?:t|time|zeit|temps|tiempo)\b/i.test(first)) return null
  return {
    code: 'damaged-row',
    what: `the line above the table ("${around.labels.slice(0, 3).join('", "')}") is neither heading nor row`,
    remedy: 'mend it; a table with wavelengths along a row is not read',
  }
}

/** A last line without its line end and with fewer digits than all others was cut off while it was written. */
const cutShort = (table: Table, xColumn: number, column: number, file: string): Fault | null => {
  const { rows } = table
  if (!table.unended || rows.length < 5 || column !== table.columns - 1 || column === xColumn) return null
  const cut = (what: string): Fault => ({
    code: 'cut-short',
    place: placeIn(table, rows.length - 1, column, file),
    what: `${what} and no line end: the file was cut short`,
    remedy: 'copy the file again when it is complete',
  })
  const decimals = (row: number) => /[.,](\d*)$/.exec(textIn(table, row, column))?.[1]?.length ?? 0
  if (rows.at(-1)!.values[column] === EMPTY && rows.at(-2)!.values[column] !== EMPTY)
    return cut('the last line has no ordinate')
  const usual = decimals(0)
  if (decimals(-1) >= usual || !rows.slice(0, -1).every((_, i) => decimals(i) === usual)) return null
  return cut(`the last number "${textIn(table, -1, column)}" has fewer digits than all others`)
}
