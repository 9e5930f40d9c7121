/** A matrix as spectra: the row of wavelengths is the axis of all, each row below gives one, with the name or the time it is headed by. */
import type { Fault, Place } from '../fault.ts'
import { type Attempt, extreme, faultyAt } from './attempt.ts'
import { axisFault, gapWarnings, unitsByValue } from './axis.ts'
import { cellsOf, columnAt } from './cells.ts'
import { axisUnitOf, type Complaint, isMonotone, ordinatesOf } from './columns.ts'
import { factsOf } from './facts.ts'
import { pairsOf, type Surroundings } from './headings.ts'
import { axisWordsOf, type Matrix, type MatrixRow } from './matrix.ts'
import { factsOfRow, isMoment, numberIn, timesOf } from './rowTimes.ts'
import { sampleOfLabel } from './sample.ts'
import type { RawSpectrum, ReadingHints } from './types.ts'
import { factOf, ordinateWords } from './words.ts'

/** Reads the spectra of a matrix. */
export const readMatrix = (matrix: Matrix, file: string, hints: ReadingHints): Attempt => {
  const { dialect, head, headings, x, rows } = matrix
  const top: Place = { at: file, line: head.number }
  const tried = { dialect, line: head.number, layout: `a spectrum a row, ${x.length} abscissae` }
  const failed = (complaint: Complaint, place = top): Attempt => faultyAt(tried, place, complaint)
  if (matrix.broken) {
    const { line, column, code, what } = matrix.broken
    return failed(
      { code, what, remedy: 'mend or export the file again; a table must be whole' },
      { at: file, line, column },
    )
  }
  const doubtful = hints.layout === undefined ? eitherWay(matrix) : null
  if (doubtful) return failed(doubtful)
  const around = surroundingsOf(matrix)
  const label = axisWordsOf(matrix)
  const unit = axisUnitOf(label, around, x, hints)
  if (unit.kind === 'open') return failed(unit.complaint)
  const placeOf = (i: number): Place => ({
    ...top,
    column: columnAt(head.text, dialect.delimiter, headings.length + i),
  })
  const ordinates = ordinatesOf(
    rows.map((_, r) => r),
    quantitiesOf(rows),
    around,
    (r) => extreme(rows[r]!.values, 1),
    (r) => extreme(rows[r]!.values, -1),
    hints,
  )
  if (ordinates.kind === 'open') return failed(ordinates.complaint)
  const shared = factsOf(around.pairs, file)
  const facts = rows.map((row) => factsOfRow(matrix, row, around.pairs, file))
  const times = timesOf(matrix, shared, facts, file)
  const warnings: Fault[] = [
    ...[...unit.warnings, ...ordinates.warnings].map(({ code, what, remedy }) => ({ code, place: top, what, remedy })),
    ...onePerCode([...facts.flatMap((own) => own.warnings), ...times.warnings]),
  ]
  const spectra: RawSpectrum[] = []
  for (const { column: r, kind } of ordinates.value) {
    const row = rows[r]!
    const own = facts[r]!
    const fault = axisFault(x, row.values, unit.value, placeOf) ?? cutShort(matrix, r, file)
    if (fault) return { ...tried, kind: 'faulty', fault, settle: [] }
    const wavelength = unit.value === 'nm' || unit.value === 'um'
    spectra.push({
      index: spectra.length,
      x,
      y: row.values,
      xUnit: unit.value,
      medium: wavelength ? (hints.medium ?? own.medium) : own.medium,
      yKind: kind,
      sample: sampleOf(headings, row) ?? own.sample,
      title: own.title,
      time: times.value[r]!,
      pathMm: own.pathMm,
      temperatureC: own.temperatureC,
      concentrationMolPerL: own.concentrationMolPerL,
      header: own.header,
      warnings: gapWarnings(x, unit.value, placeOf),
    })
  }
  return { ...tried, kind: 'spectra', spectra, warnings }
}

/** Where the first column too can be an axis, nothing in the numbers tells which way the spectra run. */
const eitherWay = ({ rows, x }: Matrix): Complaint | null => {
  const column = Float64Array.from(rows, ({ labels }) => numberIn(labels[0] ?? '') ?? Number.NaN)
  if (column.length < 3 || !isMonotone(column) || unitsByValue(column).length !== 1) return null
  const what = `two readings are possible: the axis runs along the first row (${x[0]} to ${x.at(-1)}), or down the first column (${column[0]} to ${column.at(-1)})`
  return {
    code: 'ambiguous-layout',
    what,
    remedy: 'say which with `reading: { layout: … }`: rows where a spectrum is a row, columns where it is a column',
    settle: [{ layout: 'rows' }, { layout: 'columns' }],
  }
}

/** Everything in words around the matrix; what the leading columns are headed by counts as a note too. */
const surroundingsOf = ({ above, comments, below, headings, head, dialect }: Matrix): Surroundings => {
  const notes = [...above, ...comments, ...below]
  return {
    labels: headings,
    pairs: notes.flatMap((line) => pairsOf(line, dialect.delimiter)),
    notes: [...notes, ...headings.map((text) => ({ number: head.number, text }))],
    headed: true,
  }
}

/** Labels of rows as headings of ordinates: only where every row names its quantity; names of samples are none. */
const quantitiesOf = (rows: readonly MatrixRow[]): readonly string[] => {
  const named = rows.map(({ labels }) => labels.find((label) => ordinateWords(label).kind === 'known') ?? '')
  return named.every((label) => label !== '') ? named : rows.map(() => '')
}

/** The sample that a row is headed by under no heading or one that is unknown here; numbers alone name nothing. */
const sampleOf = (headings: readonly string[], { labels }: MatrixRow): string | null => {
  for (const [k, heading] of headings.entries()) {
    const label = labels[k]!
    const speaks = factOf(heading) !== null && factOf(heading) !== 'axis' && factOf(heading) !== 'ordinate'
    if (speaks || label === '' || numberIn(label) !== null || isMoment(heading, label)) continue
    return ordinateWords(label).kind === 'known' ? sampleOfLabel(label, true) : label
  }
  return null
}

/** One warning of each kind: rows are many. */
const onePerCode = (faults: readonly Fault[]): readonly Fault[] =>
  faults.filter((fault, i) => faults.findIndex(({ code }) => code === fault.code) === i)

/** A last number without a line end and with fewer digits than all others of its row was cut off while it was written. */
const cutShort = ({ rows, unended, dialect, headings }: Matrix, r: number, file: string): Fault | null => {
  if (!unended || r !== rows.length - 1) return null
  const { text, number, labels } = rows[r]!
  const cells = (cellsOf(text, dialect.delimiter) ?? []).slice(labels.length)
  const decimals = (cell: string) => /[.,](\d*)$/.exec(cell)?.[1]?.length ?? 0
  const usual = decimals(cells[0]!)
  const last = cells.at(-1)!
  if (decimals(last) >= usual || !cells.slice(0, -1).every((cell) => decimals(cell) === usual)) return null
  return {
    code: 'cut-short',
    place: { at: file, line: number, column: columnAt(text, dialect.delimiter, headings.length + cells.length - 1) },
    what: `the last number "${last}" has fewer digits than all others and no line end: the file was cut short`,
    remedy: 'copy the file again when it is complete',
  }
}
