/** Tables with a row of wavelengths and a spectrum a row, written in every dialect that is ours to combine, read back exactly. */
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { readSpectra } from '../../src/readers/index.ts'

const spectra = fc.array(fc.array(fc.integer({ min: -500, max: 25_000 }), { minLength: 12, maxLength: 12 }), {
  minLength: 2,
  maxLength: 6,
})
const dialect = fc.record({
  delimiter: fc.constantFrom(';', ',', '\t'),
  decimal: fc.constantFrom('.', ','),
  end: fc.constantFrom('\n', '\r\n', '\r'),
  from: fc.integer({ min: 320, max: 500 }),
  step: fc.constantFrom(0.5, 1, 2.5, 5),
  descending: fc.boolean(),
})

const encoder = new TextEncoder()

describe('a row of wavelengths over rows of spectra', () => {
  it('reads back as it was written, names and order kept', () => {
    fc.assert(
      fc.property(spectra, dialect, (rows, { delimiter, decimal, end, from, step, descending }) => {
        const mark = delimiter === ',' ? '.' : decimal
        const nm = Array.from({ length: 12 }, (_, i) => from + i * step)
        if (descending) nm.reverse()
        const number = (value: number, digits: number) => value.toFixed(digits).replace('.', mark)
        const lines = [
          'Absorbance',
          ['sample', ...nm.map((v) => `${number(v, 1)} nm`)].join(delimiter),
          ...rows.map((row, k) => [`S-${k}`, ...row.map((v) => number(v / 10_000, 4))].join(delimiter)),
        ]
        const reading = readSpectra(encoder.encode(lines.join(end) + end), 'm.csv', {})
        if (reading.kind === 'refused') throw new Error(`${reading.faults[0].what}\n${lines.join('\n')}`)
        expect(reading.spectra.map(({ sample }) => sample)).toEqual(rows.map((_, k) => `S-${k}`))
        for (const [k, { x, y, xUnit, yKind }] of reading.spectra.entries()) {
          expect([xUnit, yKind]).toEqual(['nm', 'absorbance'])
          expect(Array.from(x)).toEqual(nm.map((v) => Number(v.toFixed(1))))
          expect(Array.from(y)).toEqual(rows[k]!.map((v) => Number((v / 10_000).toFixed(4))))
        }
      }),
      { numRuns: 150 },
    )
  })

  it('counts time from the start that the file states, in the unit of the heading', () => {
    const units = [
      ['s', 1],
      ['min', 60],
      ['h', 3600],
    ] as const
    for (const [unit, seconds] of units) {
      const passed = [0, 1, 2.5, 40]
      const lines = [
        'Date: 2026-03-02T09:00:00+01:00',
        `time (${unit}),${Array.from({ length: 12 }, (_, i) => `${400 + i} nm`).join(',')}`,
        ...passed.map((t) => `${t},${Array.from({ length: 12 }, (_, i) => (0.1 + i / 100).toFixed(3)).join(',')}`),
      ]
      const reading = readSpectra(encoder.encode(`Absorbance\n${lines.join('\n')}\n`), 't.csv', {})
      if (reading.kind === 'refused') throw new Error(reading.faults[0].what)
      const start = Date.parse('2026-03-02T09:00:00Z')
      expect(reading.spectra.map(({ time }) => Date.parse(`${time!.local}Z`) - start)).toEqual(
        passed.map((t) => t * seconds * 1000),
      )
      expect(reading.spectra.every(({ time }) => time!.offset === '+01:00')).toBe(true)
    }
  })
})
