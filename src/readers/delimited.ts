/**
 * Delimited text. Every dialect that could be meant is tried; a file is read when exactly one reading makes sense as a spectrum, or
 * when all that do give the same numbers. Otherwise it is refused, with the readings named and the YAML that settles it.
 */
import type { Fault } from '../fault.ts'
import { axisFault, gapWarnings } from './axis.ts'
import { axisUnitOf, type Complaint, type Group, groupColumns, ordinatesOf } from './columns.ts'
import { dialectsFor, readable, withoutDeclaration } from './dialects.ts'
import { factsOf } from './facts.ts'
import { type Surroundings, surroundingsOf } from './headings.ts'
import { ordinateOfText } from './numbers.ts'
import { sampleOfLabel } from './sample.ts'
import { settleYaml } from './settle.ts'
import type { Delimiter, Table } from './table.ts'
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
    const attempts = readable(lines, dialectsFor(hints, declared)).map((table) => attemptOn(table, file, hints))
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
    place: { at: file, line: attempts[0]!.table.rows[0]!.line },
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

const distinct = (attempts: readonly Extract<Attempt, { kind: 'spectra' }>[]): typeof attempts => {
  const seen = new Map<string, (typeof attempts)[number]>()
  for (const attempt of attempts) {
    const key = attempt.spectra.map((s) => `${s.xUnit} ${s.yKind} ${s.x.join()} ${s.y.join()}`).join('|')
    if (!seen.has(key)) seen.set(key, attempt)
  }
  return [...seen.values()]
}

const attemptOn = (table: Table, file: string, hints: ReadingHints): Attempt => {
  const faulty = (complaint: Complaint, line: number): Attempt => {
    const column = complaint.column === undefined ? undefined : table.rows[0]!.cells[complaint.column]?.column
    const fault: Fault = {
      code: complaint.code,
      place: { at: file, line, ...(column === undefined ? {} : { column }) },
      what: complaint.what,
      remedy: complaint.remedy,
    }
    return { kind: 'faulty', table, faults: [fault], settle: complaint.settle ?? [] }
  }
  const top = table.rows[0]!.line
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
    const finite = (c: number) => columns[c]!.filter((v) => Number.isFinite(v))
    const ordinates = ordinatesOf(
      group.ys,
      around.labels,
      around,
      (c) => extreme(finite(c), 1),
      (c) => extreme(finite(c), -1),
      hints,
    )
    if (ordinates.kind === 'open') return faulty(ordinates.complaint, top)
    for (const { code, what, remedy } of [...unit.warnings, ...ordinates.warnings])
      warnings.push({ code, place: { at: file, line: top }, what, remedy })
    const placeOf = (i: number) => ({
      at: file,
      line: table.rows[i]?.line ?? top,
      column: table.rows[i]?.cells[group.x]?.column ?? 1,
    })
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

const extreme = (values: Float64Array, sign: 1 | -1): number =>
  values.reduce((most, v) => (v * sign > most * sign ? v : most), values[0] ?? 0)

/** The numbers of a column down to its last filled cell; NaN where missing, Infinity for an overflow word. */
const columnOf = (table: Table, column: number): Float64Array => {
  let length = table.rows.length
  while (length > 0 && (table.rows[length - 1]!.cells[column]?.text ?? '') === '') length--
  const { decimal } = table.dialect
  return Float64Array.from(
    { length },
    (_, i) => ordinateOfText(table.rows[i]!.cells[column]!.text, decimal) ?? Number.NaN,
  )
}

const padded = (y: Float64Array, length: number): Float64Array => {
  if (y.length >= length) return y
  const out = new Float64Array(length).fill(Number.NaN)
  out.set(y)
  return out
}

/** An ordinate without its abscissa, or an abscissa that is no number. */
const holeIn = (table: Table, group: Group, x: Float64Array, file: string): Fault | null => {
  const i = x.findIndex((v) => !Number.isFinite(v))
  const beyond = table.rows.findIndex(
    (row, r) => r >= x.length && group.ys.some((c) => (row.cells[c]?.text ?? '') !== ''),
  )
  const at = i >= 0 ? i : beyond
  if (at < 0) return null
  const row = table.rows[at]!
  const place = { at: file, line: row.line, column: row.cells[group.x]?.column ?? 1 }
  return {
    code: 'axis-hole',
    place,
    what: `the axis has no number here ("${row.cells[group.x]?.text ?? ''}")`,
    remedy: 'every ordinate needs its abscissa',
  }
}

/** A comma that may be both: whole numbers between commas, with nothing to say how many columns there are. */
const commaTwice = (table: Table, around: Surroundings): Complaint | null => {
  if (table.dialect.delimiter !== ',') return null
  const whole = table.rows.every((row) => row.cells.every((cell) => !cell.quoted && /^[+-]?\d*$/.test(cell.text)))
  if (!whole || around.headed) return null
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
  const digits = (row: Table['rows'][number]) => /[.,](\d*)$/.exec(row.cells[column]?.text ?? '')?.[1]?.length ?? 0
  const last = table.rows.at(-1)!
  if (!table.unended || table.rows.length < 5 || column !== table.columns - 1 || column === xColumn) return null
  const usual = digits(table.rows[0]!)
  if (last.cells[column]!.text === '' && table.rows.at(-2)!.cells[column]!.text !== '') {
    return {
      code: 'cut-short',
      place: { at: file, line: last.line, column: last.cells[column]!.column },
      what: 'the last line has no ordinate and no line end: the file was cut short',
      remedy: 'copy the file again when it is complete',
    }
  }
  if (digits(last) >= usual || !table.rows.slice(0, -1).every((row) => digits(row) === usual)) return null
  const what = `the last number "${last.cells[column]!.text}" has fewer digits than all others and no line end: the file was cut short`
  return {
    code: 'cut-short',
    place: { at: file, line: last.line, column: last.cells[column]!.column },
    what,
    remedy: 'copy the file again when it is complete',
  }
}
