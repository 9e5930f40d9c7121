/** What must hold of any file, for the short runs of the tests and the long ones of the proof. */
import fc from 'fast-check'
import { expect } from 'vitest'
import { readSpectra } from '../../src/readers/index.ts'
import { type Form, type WrittenDialect, writeJcamp, writeMatrix, writeNtuples, writeTable } from './writers.ts'

const HEADINGS: readonly (readonly [string, string])[] = [
  ['nm', 'absorbance'],
  ['Wavelength (nm)', 'Abs'],
  ['Wellenlänge [nm]', 'Extinktion'],
  ["Longueur d'onde (nm)", 'Absorbance'],
  ['Longitud de onda (nm)', 'Absorbancia'],
  ['λ/nm', 'A'],
]

const axis = fc
  .record({
    first: fc.integer({ min: 1900, max: 6000 }),
    step: fc.integer({ min: 1, max: 50 }),
    n: fc.integer({ min: 5, max: 60 }),
    down: fc.boolean(),
  })
  .map(({ first, step, n, down }) => {
    const x = Array.from({ length: n }, (_, i) => (first + i * step) / 10)
    return down ? x.reverse() : x
  })

const dialect: fc.Arbitrary<WrittenDialect> = fc
  .record({
    delimiter: fc.constantFrom(',', ';', '\t', '|', ' '),
    decimal: fc.constantFrom('.', ','),
    eol: fc.constantFrom('\n', '\r', '\r\n'),
    encoding: fc.constantFrom('utf-8', 'utf-8-bom', 'utf-16le', 'utf-16be', 'latin-1'),
    heading: fc.constantFrom(...HEADINGS),
    exponent: fc.constantFrom('none', 'e', 'E', 'D'),
    quoted: fc.boolean(),
    header: fc.constantFrom(
      [],
      ['# made up'],
      ['Sample: X-1', 'Path length: 10 mm', ''],
      ['Probe: X-1', 'Datum: 02.03.2026'],
    ),
    footer: fc.constantFrom([], ['', 'Temperature: 25 °C'], ['# end']),
  })
  .map((d) => ({
    ...d,
    // unquoted, a comma cannot be both; Latin-1 has no λ
    quoted: d.quoted || (d.delimiter === ',' && d.decimal === ','),
    heading: d.encoding === 'latin-1' && d.heading[0].includes('λ') ? HEADINGS[0]! : d.heading,
  })) as fc.Arbitrary<WrittenDialect>

/** At least one ordinate has a decimal mark, as every measured absorbance has. */
const ordinates = (n: number) =>
  fc
    .array(fc.integer({ min: -5_000, max: 300_000 }), { minLength: n, maxLength: n })
    .map((y) => y.map((v, i) => (i === 0 ? 0.1234 : v / 1e5)))

const spectrum = axis.chain((x) => fc.record({ x: fc.constant(x), y: ordinates(x.length) }))

/** A spectrum written in any dialect reads back exactly. */
export const readsBack = (numRuns: number): void =>
  fc.assert(
    fc.property(spectrum, dialect, ({ x, y }, d) => {
      const reading = readSpectra(writeTable(x, y, d), 'f', {})
      if (reading.kind === 'refused') throw new Error(JSON.stringify(reading.faults))
      expect([...reading.spectra[0]!.x]).toEqual(x)
      expect([...reading.spectra[0]!.y]).toEqual(y)
    }),
    { numRuns, seed: 11 },
  )

/** Ordinates of eight digits, the last one not zero: no damage of a few bytes makes one of them into another. */
const marked = axis.chain((x) =>
  fc
    .array(fc.noBias(fc.integer({ min: 1_000_000, max: 9_999_999 })), { minLength: x.length, maxLength: x.length })
    .map((y) => ({ x, y: y.map((v, i) => v * 10 + 1 + (i % 9)) })),
)

type Mutation = {
  readonly kind: 'digit' | 'replace' | 'insert' | 'delete' | 'cut' | 'double'
  readonly where: number
  readonly byte: number
  readonly length: number
}

const mutation: fc.Arbitrary<Mutation> = fc.record({
  kind: fc.constantFrom('digit', 'digit', 'digit', 'replace', 'insert', 'delete', 'cut', 'double'),
  // without bias: damage falls anywhere in the file, not mostly at its start
  where: fc.noBias(fc.integer({ min: 0, max: 999_999 })).map((v) => v / 1e6),
  byte: fc.oneof(
    fc.constantFrom(...Buffer.from('0123456789.,;-+eE \t\n\r"#=@AJTa%')),
    fc.integer({ min: 0, max: 255 }),
  ),
  length: fc.integer({ min: 1, max: 40 }),
})

const mutate = (bytes: Uint8Array, { kind, where, byte, length }: Mutation): Uint8Array => {
  const at = Math.floor(where * bytes.length)
  const [before, after] = [bytes.subarray(0, at), bytes.subarray(at)]
  if (kind === 'digit') {
    // the damage that looks most like a sound file: one digit for another
    const out = Uint8Array.from(bytes)
    const place = out.findIndex((b, i) => i >= at && b >= 0x30 && b <= 0x39)
    if (place >= 0) out[place] = 0x30 + (byte % 10)
    return out
  }
  if (kind === 'replace') return Buffer.concat([before, [byte], after.subarray(1)].map((part) => Buffer.from(part)))
  if (kind === 'insert') return Buffer.concat([before, [byte], after].map((part) => Buffer.from(part)))
  if (kind === 'delete') return Buffer.concat([before, after.subarray(length)])
  if (kind === 'cut') return Buffer.from(before)
  return Buffer.concat([before, after.subarray(0, length), after])
}

interface Written {
  readonly write: (x: readonly number[], y: readonly number[]) => Uint8Array
  /** Damages at the most. */
  readonly most?: number
}

const forms = fc.constantFrom<Form>('AFFN', 'PAC', 'SQZ', 'DIF', 'DIFDUP')
const fractions = (counts: readonly number[]): readonly number[] => counts.map((v) => v / 1e8)

/**
 * A damaged file is refused, or every point is where it was to within a step: each point that comes back lies within one step of a
 * point of the original axis, in that order, unless a warning says that the axis was touched.
 */
export const survivesMutation = (numRuns: number): void =>
  fc.assert(
    fc.property(
      marked,
      fc.oneof(
        dialect.map((d) => ({ write: (x: readonly number[], y: readonly number[]) => writeTable(x, fractions(y), d) })),
        dialect
          .filter(({ delimiter, decimal }) => delimiter !== ' ' && !(delimiter === ',' && decimal === ','))
          .map((d) => ({
            write: (x: readonly number[], y: readonly number[]) => writeMatrix(x, fractions(y), d),
            // no abscissa stands beside its numbers: a cell too many here and one too few there cannot be seen
            most: 1,
          })),
        forms.map((form) => ({
          write: (x: readonly number[], y: readonly number[]) => writeJcamp(x, y, form, 8, 1e-8),
        })),
        forms.map((form) => ({
          write: (x: readonly number[], y: readonly number[]) => writeNtuples(x, y, form, 8, 1e-8),
        })),
      ),
      fc.array(mutation, { minLength: 1, maxLength: 3 }),
      ({ x, y: counts }, { write, most = 3 }: Written, mutations) => {
        const y = fractions(counts)
        const whole = write(x, counts)
        const bytes = mutations.slice(0, most).reduce<Uint8Array>(mutate, whole)
        const began = performance.now()
        const reading = readSpectra(bytes, 'f', {})
        expect(performance.now() - began).toBeLessThan(2000)
        if (reading.kind === 'refused') {
          expect(reading.faults[0].remedy).not.toBe('')
          return
        }
        const step = Math.abs(x[1]! - x[0]!) * 1.0001
        for (const read of reading.spectra) {
          if ([...reading.warnings, ...read.warnings].some(({ code }) => code.startsWith('axis'))) continue
          const nm =
            read.xUnit === 'nm'
              ? read.x
              : read.xUnit === 'um'
                ? read.x.map((v) => v * 1000)
                : read.x.map((v) => 1e7 / v)
          for (const v of nm) expect(Math.min(...x.map((u) => Math.abs(u - v)))).toBeLessThanOrEqual(step)
          // what kept its ordinate kept its place: compare at ordinates that stand once in the file
          for (const [i, value] of y.entries()) {
            if (y.indexOf(value) !== y.lastIndexOf(value)) continue
            const at = [...read.y.keys()].filter((k) => Math.abs(read.y[k]! - value) < 1e-12)
            if (at.length === 1) expect(Math.abs(nm[at[0]!]! - x[i]!)).toBeLessThanOrEqual(step)
          }
        }
      },
    ),
    { numRuns, seed: 23 },
  )
