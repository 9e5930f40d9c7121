/**
 * The tables of JCAMP-DX, checked at every place where they state something twice: the abscissa that begins each line, the ordinate
 * that a line after differences repeats, the number of points, the first and last abscissa and their distance. An axis
 * that contradicts itself moves every band, so it is refused; FIRSTY and extrema move nothing and become warnings.
 */
import type { Fault } from '../fault.ts'
import { decodeLine, sayForms } from './asdf.ts'
import { type Numbers, numbersOf, PLAIN, unitOf, type Written } from './jcampNumbers.ts'
import type { Block, JcampRecord } from './jcampRecords.ts'

export type Points =
  | {
      readonly kind: 'points'
      readonly x: Float64Array
      readonly y: Float64Array
      readonly lines: ArrayLike<number>
      readonly forms: string
      readonly warnings: readonly Fault[]
    }
  | { readonly kind: 'faulty'; readonly fault: Fault }

/** The points of a block's table, real units, in the order of the file. */
export const pointsOf = (block: Block, table: JcampRecord, file: string): Points => {
  const faulty = (
    line: number,
    code: string,
    what: string,
    remedy = 'export the file again',
    column?: number,
  ): Points => ({
    kind: 'faulty',
    fault: { code, place: { at: file, line, ...(column === undefined ? {} : { column }) }, what, remedy },
  })
  const numbers = numbersOf(block, file)
  if (numbers.fault) return { kind: 'faulty', fault: numbers.fault }
  const [first, last, count] = [numbers.of('FIRSTX'), numbers.of('LASTX'), numbers.of('NPOINTS')]
  const [xFactor, yFactor] = [numbers.of('XFACTOR')?.value ?? 1, numbers.of('YFACTOR')?.value ?? 1]
  if (!(xFactor > 0) || !(yFactor > 0))
    return faulty(table.line, 'bad-factor', `XFACTOR ${xFactor} and YFACTOR ${yFactor} must be above zero`)
  if (count && !(Number.isInteger(count.value) && count.value > 0 && count.value <= 10_000_000))
    return faulty(count.line, 'bad-count', `NPOINTS ${count.value} is no number of points`)
  const form = table.value.replace(/\s/g, '').toUpperCase()
  const pairs = form === '(XY..XY)'
  if (!pairs && form !== '(X++(Y..Y))')
    return faulty(table.line, 'unknown-table', `a table of the form "${table.value}" is not read`)
  if (!count) return faulty(table.line, 'label-missing', 'NPOINTS is missing: nothing says whether the table is whole')
  if (!pairs && (!first || !last))
    return faulty(table.line, 'label-missing', 'FIRSTX or LASTX is missing: nothing says where the axis lies')
  const raw = pairs ? pairsIn(table, file) : sequenceIn(table, file, first!, last!, count, xFactor)
  if (raw.kind === 'faulty') return raw
  const end = table.body.at(-1)?.number ?? table.line
  if (raw.y.length !== count.value) {
    return faulty(
      end,
      'point-count',
      `the table holds ${raw.y.length} points where NPOINTS says ${count.value}`,
      'the file was cut short or changed: export it again',
    )
  }
  const x = pairs ? scaled(raw.x, xFactor) : axisOf(first!.value, last!.value, count.value)
  const y = scaled(raw.y, yFactor)
  for (const [written, i] of [
    [first, 0],
    [last, x.length - 1],
  ] as const) {
    if (pairs && written && Math.abs(written.value - x[i]!) > Math.max(written.unit, 1e-9 * Math.abs(x[i]!))) {
      return faulty(
        written.line,
        'axis-contradiction',
        `${i === 0 ? 'FIRSTX' : 'LASTX'} ${written.value} contradicts the table, where it is ${x[i]}`,
      )
    }
  }
  const delta = numbers.of('DELTAX')
  const warnings: Fault[] = []
  if (!pairs && delta && count.value > 1) {
    const step = (last!.value - first!.value) / (count.value - 1)
    const off = Math.abs(Math.abs(delta.value) - Math.abs(step))
    if (
      off > Math.max(0.500001 * delta.unit, 1e-4 * Math.abs(step)) &&
      off > (first!.unit + last!.unit) / (count.value - 1)
    ) {
      return faulty(
        delta.line,
        'axis-contradiction',
        `DELTAX ${delta.value} contradicts (LASTX − FIRSTX)/(NPOINTS − 1) = ${step}`,
      )
    }
    if (delta.value * step < 0)
      warnings.push({
        code: 'deltax-sign',
        place: { at: file, line: delta.line },
        what: `DELTAX ${delta.value} has the sign against the direction of the axis`,
        remedy: 'nothing to do; the axis is taken from FIRSTX and LASTX',
      })
  }
  const step = count.value > 1 ? Math.abs(x[x.length - 1]! - x[0]!) / (count.value - 1) : 0
  const byDelta = delta ? 0.5 * delta.unit * (count.value - 1) : Number.POSITIVE_INFINITY
  if (!pairs && Math.min(raw.confirmed, byDelta) > step * 1.000001) {
    warnings.push({
      code: 'axis-unconfirmed',
      place: { at: file, line: last!.line },
      what: `nothing in the table confirms LASTX ${last!.value} to within a step`,
      remedy: 'export with more lines, or with DELTAX',
    })
  }
  return {
    kind: 'points',
    x,
    y,
    lines: raw.lines,
    forms: raw.forms,
    warnings: [...warnings, ...ordinateWarnings(y, yFactor, numbers, file)],
  }
}

/** Evenly spaced, rounded to twelve digits: what is beyond comes of the arithmetic. */
const axisOf = (first: number, last: number, count: number): Float64Array => {
  const step = count > 1 ? (last - first) / (count - 1) : 0
  const scale = 10 ** (12 - Math.ceil(Math.log10(Math.max(Math.abs(first), Math.abs(last), 1e-300))))
  const x = new Float64Array(count)
  for (let i = 0; i < count; i++) x[i] = Math.round((first + i * step) * scale) / scale
  x[count - 1] = last
  return x
}

const scaled = (values: ArrayLike<number>, by: number): Float64Array => {
  const result = new Float64Array(values.length)
  for (let i = 0; i < values.length; i++) result[i] = values[i]! * by
  return result
}

type RawPoints =
  | {
      readonly kind: 'raw'
      readonly x: ArrayLike<number>
      readonly y: ArrayLike<number>
      readonly lines: ArrayLike<number>
      readonly forms: string
      /** How far the last abscissa could be wrong for all that the lines say: nothing after the last line's own is written. */
      readonly confirmed: number
    }
  | { readonly kind: 'faulty'; readonly fault: Fault }

const sequenceIn = (
  table: JcampRecord,
  file: string,
  first: Written,
  last: Written,
  count: Written,
  xFactor: number,
): RawPoints => {
  const faulty = (line: number, column: number, code: string, what: string): RawPoints => ({
    kind: 'faulty',
    fault: {
      code,
      place: { at: file, line, column },
      what,
      remedy: 'the file was damaged or changed: export it again',
    },
  })
  const step = count.value > 1 ? (last.value - first.value) / (count.value - 1) : 0
  const y = new Float64Array(count.value)
  const lines = new Int32Array(count.value)
  let have = 0
  let forms = 0
  let check = false
  let confirmed = Number.POSITIVE_INFINITY
  for (const { number, text } of table.body) {
    const decoded = decodeLine(text)
    if (decoded.kind === 'wrong') return faulty(number, decoded.column, 'bad-ordinate', decoded.what)
    const { x, xColumn, xText, ordinates, column, endsInDifference } = decoded.value
    forms |= decoded.value.forms
    if (ordinates.length === 0)
      return faulty(number, xColumn, 'no-ordinates', 'a line with an abscissa and no ordinate')
    // the abscissa of a line with a check ordinate is that of the point it repeats
    const at = check ? have - 1 : have
    const expected = first.value + at * step
    // an abscissa is rounded where it ends
    const tolerance = Math.max(0.5 * unitOf(xText) * xFactor, 0.05 * Math.abs(step)) * 1.000001
    confirmed = at > 0 ? (tolerance * (count.value - 1)) / at : Number.POSITIVE_INFINITY
    if (Math.abs(x * xFactor - expected) > tolerance) {
      const what = `the line begins at X = ${x * xFactor} where FIRSTX, LASTX and NPOINTS put point ${at + 1} at ${Number(expected.toPrecision(10))}`
      return faulty(number, xColumn, 'axis-contradiction', what)
    }
    if (check && ordinates[0] !== y[have - 1]) {
      return faulty(
        number,
        column,
        'check-ordinate',
        `the check ordinate is ${ordinates[0]}, the line before ended at ${y[have - 1]}`,
      )
    }
    const repeated = check ? 1 : 0
    if (have + ordinates.length - repeated > count.value)
      return faulty(number, 1, 'point-count', `the table holds more points than the ${count.value} of NPOINTS`)
    for (let k = repeated; k < ordinates.length; k++) {
      y[have] = ordinates[k]!
      lines[have++] = number
    }
    check = endsInDifference
  }
  return { kind: 'raw', x: [], y: y.subarray(0, have), lines, forms: sayForms(forms), confirmed }
}

const pairsIn = (table: JcampRecord, file: string): RawPoints => {
  const x: number[] = []
  const y: number[] = []
  const lines: number[] = []
  for (const { number, text } of table.body) {
    const groups = text
      .trim()
      .replace(/\s*,\s*/g, ',')
      .replace(/\s*;\s*/g, ' ')
      .trim()
      .split(/\s+/)
    const tokens = groups.flatMap((group) => group.split(','))
    const wrong = tokens.find((token, i) => !PLAIN.test(token) && !(i % 2 === 1 && token === '?'))
    const odd = tokens.length % 2 === 1 || groups.some((group) => group.includes(',') && group.split(',').length !== 2)
    if (wrong !== undefined || odd) {
      const what = wrong !== undefined ? `"${wrong}" is no number` : 'an abscissa without an ordinate'
      return {
        kind: 'faulty',
        fault: {
          code: 'bad-pair',
          place: { at: file, line: number, column: Math.max(1, text.indexOf(wrong ?? tokens.at(-1)!) + 1) },
          what,
          remedy: 'export the file again',
        },
      }
    }
    for (let i = 0; i < tokens.length; i += 2) {
      x.push(Number(tokens[i]))
      y.push(tokens[i + 1] === '?' ? Number.NaN : Number(tokens[i + 1]))
      lines.push(number)
    }
  }
  return { kind: 'raw', x, y, lines, forms: 'AFFN pairs', confirmed: 0 }
}

/** FIRSTY, MINY, MAXY against the data. FIRSTY is found in published files in the table's own units too: both are accepted. */
const ordinateWarnings = (y: Float64Array, yFactor: number, numbers: Numbers, file: string): readonly Fault[] => {
  let [least, most] = [Infinity, -Infinity]
  for (let i = 0; i < y.length; i++) {
    const v = y[i]!
    if (v < least) least = v
    if (v > most) most = v
  }
  const warnings: Fault[] = []
  const compare = (label: string, actual: number, scales: readonly number[]) => {
    const said = numbers.of(label)
    if (!said || scales.some((s) => Math.abs(said.value * s - actual) <= Math.max(yFactor, said.unit * s) * 1.000001))
      return
    const what = `${label} is ${said.value}, the data say ${Number(actual.toPrecision(7))}`
    warnings.push({
      code: `${label.toLowerCase()}-contradiction`,
      place: { at: file, line: said.line },
      what,
      remedy: 'nothing moves by it; the data were taken',
    })
  }
  if (Number.isFinite(y[0])) compare('FIRSTY', y[0]!, [1, yFactor])
  if (least <= most) {
    compare('MAXY', most, [1])
    compare('MINY', least, [1])
  }
  return warnings
}
