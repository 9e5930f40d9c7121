import { parse } from 'csv-parse/sync'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { cellsOf } from '../../src/readers/cells.ts'
import { ordinateOfText, plainNumber } from '../../src/readers/numbers.ts'
import { EMPTY, rowOf } from '../../src/readers/rows.ts'

const DELIMITERS = [',', ';', '\t', '|'] as const

describe('numbers in text', () => {
  it('any number reads as the JavaScript engine reads it, to the last bit', () => {
    const digits = fc.string({ unit: fc.constantFrom(...'0123456789'), minLength: 1, maxLength: 20 })
    const written = fc
      .tuple(fc.constantFrom('', '-', '+'), digits, fc.option(digits), fc.option(fc.integer({ min: -320, max: 320 })))
      .map(
        ([sign, whole, part, power]) =>
          `${sign}${whole}${part === null ? '' : `.${part}`}${power === null ? '' : `e${power}`}`,
      )
    fc.assert(
      fc.property(written, (text) => {
        const plain = plainNumber(text, 0, text.length, '.')
        if (!Number.isNaN(plain)) expect(plain).toBe(Number(text))
        const read = ordinateOfText(text, '.')
        expect(read).toBe(Number.isFinite(Number(text)) ? Number(text) : null)
      }),
      { numRuns: 500, seed: 5 },
    )
  })

  it.each(['', '.', '-', '1.2.3', '1e', '1e+', '0x10', '1 2', '1,5', 'e5', '1e1234'])(
    '"%s" is no plain number',
    (text) => {
      expect(plainNumber(text, 0, text.length, '.')).toBeNaN()
    },
  )
})

describe('a row', () => {
  it('is cut as csv-parse cuts it, and holds the same numbers', () => {
    const cell = fc.oneof(
      fc.double({ min: -1e6, max: 1e6, noNaN: true }).map(String),
      fc.constantFrom('', ' ', '0.5', 'NaN', 'OVER', ' 12 ', '1e-3', '-'),
    )
    fc.assert(
      fc.property(
        fc.array(cell, { minLength: 2, maxLength: 8 }),
        fc.constantFrom(...DELIMITERS),
        (cells, delimiter) => {
          const line = ['7', ...cells].join(delimiter)
          const wanted = (parse(line, { delimiter, trim: true }) as string[][])[0]!
          expect(cellsOf(line, delimiter)).toEqual(wanted)
          const values = wanted.map((text) => (text === '' ? EMPTY : ordinateOfText(text, '.')))
          expect(rowOf(line, { delimiter, decimal: '.' })).toEqual(values)
        },
      ),
      { numRuns: 300, seed: 5 },
    )
  })

  it('whose quotes do not close is none, and those around it are', () => {
    expect(cellsOf('"400","0.5', ',')).toBeNull()
    expect(cellsOf('"400","0,5 ""x"""', ',')).toEqual(['400', '0,5 "x"'])
  })
})
