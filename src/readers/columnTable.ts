/** A table of columns: one or several axes, ordinates beside them. */
import type { Fault, Place } from '../fault.ts'
import { type Attempt, extreme, faultyAt } from './attempt.ts'
import { axisFault, gapWarnings } from './axis.ts'
import { cellsOf, columnAt } from './cells.ts'
import { axisUnitOf, type Complaint, type Group, groupColumns, ordinatesOf } from './columns.ts'
import { factsOf } from './facts.ts'
import { type Surroundings, surroundingsOf } from './headings.ts'
import { EMPTY } from './rows.ts'
import { sampleOfLabel } from './sample.ts'
import type { Table } from './table.ts'
import type { RawSpectrum, ReadingHints } from './types.ts'

/** Reads a table whose columns are axes and ordinates. */
export const readColumns = (table: Table, file: string, hints: ReadingHints): Attempt => {
  const top = table.rows[0]!.number
  const tried = { dialect: table.dialect, line: top, layout: `${table.columns} columns` }
  const failed = (complaint: Complaint): Attempt =>
    faultyAt(
      tried,
      complaint.column === undefined ? { at: file, line: top } : placeIn(table, 0, complaint.column, file),
      complaint,
    )
  const fails = (fault: Fault): Attempt => ({ ...tried, kind: 'faulty', fault, settle: [] })
  if (table.broken) {
    const { line, column, code, what } = table.broken
    const remedy = 'mend or export the file again; a table must be whole'
    return fails({ code, place: { at: file, line, column }, what, remedy })
  }
  const around = surroundingsOf(table)
  const doubtful = commaTwice(table, around) ?? damagedHeading(around)
  if (doubtful) return failed(doubtful)
  const columns = Array.from({ length: table.columns }, (_, c) => columnOf(table, c))
  const groups = groupColumns(around.labels, (c) => columns[c]!, hints)
  if (groups.kind === 'open') return failed(groups.complaint)
  const facts = factsOf(around.pairs, file)
  const warnings: Fault[] = [...facts.warnings]
  const spectra: RawSpectrum[] = []
  for (const group of groups.value) {
    const x = columns[group.x]!
    const hole = holeIn(table, group, x, file)
    if (hole) return fails(hole)
    const unit = axisUnitOf(around.labels[group.x]!, around, x, hints)
    if (unit.kind === 'open') return failed(unit.complaint)
    const ordinates = ordinatesOf(
      group.ys,
      around.labels,
      around,
      (c) => extreme(columns[c]!, 1),
      (c) => extreme(columns[c]!, -1),
      hints,
    )
    if (ordinates.kind === 'open') return failed(ordinates.complaint)
    for (const { code, what, remedy } of [...unit.warnings, ...ordinates.warnings])
      warnings.push({ code, place: { at: file, line: top }, what, remedy })
    const placeOf = (i: number) => placeIn(table, i, group.x, file)
    for (const { column, kind } of ordinates.value) {
      const y = padded(columns[column]!, x.length)
      const fault = axisFault(x, y, unit.value, placeOf) ?? cutShort(table, group.x, column, file)
      if (fault) return fails(fault)
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
  return { ...tried, kind: 'spectra', spectra, warnings }
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
  if (numeric === 0 || (2 * numeric <= around.labels.length && !/\d.*[^\d\s.,eE+-]|[^\d\s.,eE+-].*\d/.test(first)))
    return null
  if (/[a-zA-Zλ]{2}/.test(first) && !/^(?:t|time|zeit|temps|tiempo)\b/i.test(first)) return null
  return {
    code: 'damaged-row',
    what: `the line above the table ("${around.labels.slice(0, 3).join('", "')}") is neither heading nor row`,
    remedy: 'mend it, or export the file again',
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
