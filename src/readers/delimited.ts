/**
 * Delimited text. Every dialect that could be meant is tried; a file is read when exactly one reading makes sense as a spectrum, or
 * when all that do give the same numbers. Otherwise it is refused, with the readings named and the YAML that settles it.
 */
import type { Spectra } from './attempt.ts'
import type { Delimiter } from './cells.ts'
import type { Complaint } from './columns.ts'
import { readColumns } from './columnTable.ts'
import { dialectsFor, readable, withoutDeclaration } from './dialects.ts'
import { matricesIn } from './matrix.ts'
import { readMatrix } from './matrixSpectra.ts'
import { settleYaml } from './settle.ts'
import { contentOf } from './table.ts'
import { decodeText, linesOf } from './text.ts'
import type { RawSpectrum, Reader, Reading } from './types.ts'

const FORMAT = 'delimited text'
const NAMES: Readonly<Record<Delimiter, string>> = {
  ',': 'comma',
  ';': 'semicolon',
  '\t': 'tab',
  '|': 'bar',
  ' ': 'blanks',
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
    const content = contentOf(decoded.text, lines)
    const dialects = dialectsFor(hints, declared)
    const columns =
      hints.layout === 'rows' ? [] : readable(content, dialects).map((table) => readColumns(table, file, hints))
    const rows =
      hints.layout === 'columns'
        ? []
        : matricesIn(content, dialects, hints).map((matrix) => readMatrix(matrix, file, hints))
    const good = distinct([...columns, ...rows].filter((attempt) => attempt.kind === 'spectra'))
    const [only, second] = good
    const settled = rows.find((attempt) => attempt.kind === 'faulty' && attempt.fault.code === 'ambiguous-layout')
    if (only && !second && !settled) {
      const { delimiter, decimal } = only.dialect
      const dialect = `${NAMES[delimiter]}-separated, decimal ${decimal === '.' ? 'point' : 'comma'}, ${decoded.encoding}, ${only.layout}`
      return { kind: 'read', format: FORMAT, dialect, spectra: only.spectra, warnings: only.warnings }
    }
    if (only && second && !settled) return ambiguous(good, file)
    const failed = settled ?? [...rows, ...columns].find((attempt) => attempt.kind === 'faulty')
    if (failed?.kind !== 'faulty')
      return refusal(file, {
        code: 'no-table',
        what: 'there is no table of numbers in it',
        remedy: 'export the spectrum as columns of numbers, or set `reading: { delimiter: …, decimal: … }`',
      })
    return {
      kind: 'refused',
      format: FORMAT,
      faults: [failed.fault],
      settle: failed.settle.map((hint) => settleYaml({ ...failed.dialect, ...hint })),
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

const ambiguous = (attempts: readonly Spectra[], file: string): Reading => {
  const say = ({ dialect: { delimiter, decimal }, spectra, layout }: Spectra) =>
    `${NAMES[delimiter]} with decimal ${decimal === '.' ? 'point' : 'comma'}, ${layout} (first point ${spectra[0]!.x[0]}, ${spectra[0]!.y[0]})`
  const what = `two readings are possible: ${attempts.slice(0, 2).map(say).join(', or ')}`
  const fault = {
    code: 'ambiguous-dialect',
    place: { at: file, line: attempts[0]!.line },
    what,
    remedy: 'say which with `reading: { delimiter: …, decimal: … }`',
  }
  return {
    kind: 'refused',
    format: FORMAT,
    faults: [fault],
    settle: attempts.map(({ dialect }) => settleYaml(dialect)),
    spectra: [],
  }
}

/** One attempt of each set that gives the same numbers. */
const distinct = (attempts: readonly Spectra[]): typeof attempts =>
  attempts.filter((attempt, i) => !attempts.slice(0, i).some((earlier) => isSame(earlier.spectra, attempt.spectra)))

const isSame = (a: readonly RawSpectrum[], b: readonly RawSpectrum[]): boolean =>
  a.length === b.length &&
  a.every((one, k) => {
    const other = b[k]!
    return one.xUnit === other.xUnit && one.yKind === other.yKind && equal(one.x, other.x) && equal(one.y, other.y)
  })

const equal = (a: Float64Array, b: Float64Array): boolean =>
  a.length === b.length && a.every((v, i) => Object.is(v, b[i]))
