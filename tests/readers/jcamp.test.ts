import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { decodeLine } from '../../src/readers/asdf.ts'
import { readSpectra } from '../../src/readers/index.ts'
import { dif, writeJcamp } from './writers.ts'

const ordinates = (text: string): readonly number[] => {
  const line = decodeLine(text)
  if (line.kind === 'wrong') throw new Error(line.what)
  return line.value.ordinates
}

// McDonald & Wilks, Appl. Spectrosc. 42 (1988) 151, table VIIb, as restated in published guides and recomputed
describe('the number forms of the standard', () => {
  it.each([
    ['AFFN', '1 2 3 3 2 1 0 -1 -2 -3'],
    ['PAC', '1+2+3+3+2+1+0-1-2-3'],
    ['SQZ', '1BCCBA@abc'],
    ['DIF', '1JJ%jjjjjj'],
    ['DIFDUP', '1JT%jX'],
  ])('%s: 1 2 3 3 2 1 0 -1 -2 -3', (_, text) => {
    // the abscissa 400 goes before it, as a line of a table has one
    expect(ordinates(`400 ${text}`)).toEqual([1, 2, 3, 3, 2, 1, 0, -1, -2, -3])
  })

  it('the line of table VI holds 53 ordinates and ends at 128, which the next line repeats at X = 700.158', () => {
    const line = '599.860@VKT%TLkj%J%KLJ%njKjL%kL%jJULJ%kLK1%lLMNPNPRLJ0QTOJ1P'
    const found = ordinates(line)
    expect(found).toHaveLength(53)
    expect(found.slice(0, 10)).toEqual([0, 0, 0, 0, 2, 4, 4, 4, 7, 5])
    expect(found.slice(-4)).toEqual([104, 110, 121, 128])
    expect(ordinates('700.158A28')).toEqual([128])
    expect(599.86 + 52 * 1.92881).toBeCloseTo(700.158, 3)
    const file = (check: string) =>
      `##TITLE= t\n##JCAMP-DX= 4.24\n##XUNITS= NANOMETERS\n##YUNITS= ABSORBANCE\n##XFACTOR= 1\n##YFACTOR= 0.001\n##FIRSTX= 599.860\n##LASTX= 700.158\n##NPOINTS= 53\n##XYDATA= (X++(Y..Y))\n${line}\n${check}\n##END=\n`
    expect(readSpectra(new TextEncoder().encode(file('700.158A28')), 't', {}).kind).toBe('read')
    const wrong = readSpectra(new TextEncoder().encode(file('700.158A27')), 't', {})
    expect(wrong.kind === 'refused' && wrong.faults[0].code).toBe('check-ordinate')
  })

  it('E is an exponent only with a sign and two or three digits, else the squeezed digit 5', () => {
    expect(ordinates('400 1E+02 2')).toEqual([100, 2])
    expect(ordinates('400 1E2')).toEqual([1, 52])
  })

  it.each(['400TT', '400T', '400J1', '400 1TT', '400 1&2', 'x400 1'])('%s is refused', (text) => {
    expect(decodeLine(text).kind).toBe('wrong')
  })
})

describe('every form round-trips', () => {
  const values = fc.array(fc.integer({ min: -99_999, max: 99_999 }), { minLength: 3, maxLength: 80 })
  it.each(['AFFN', 'PAC', 'SQZ', 'DIF', 'DIFDUP'] as const)('%s', (form) => {
    fc.assert(
      fc.property(values, fc.integer({ min: 1, max: 20 }), fc.boolean(), (y, perLine, down) => {
        const x = y.map((_, i) => (down ? 900 - i * 0.5 : 300 + i * 0.5))
        const reading = readSpectra(writeJcamp(x, y, form, perLine), 'f', {})
        if (reading.kind === 'refused') throw new Error(JSON.stringify(reading.faults))
        expect([...reading.spectra[0]!.x]).toEqual(x)
        expect([...reading.spectra[0]!.y]).toEqual(y.map((v) => v * 1e-5))
      }),
      { numRuns: 60, seed: 5 },
    )
  })

  it('a repetition after a difference repeats the difference', () => {
    expect(ordinates(`400${dif([1, 2, 3, 4, 4, 4, 9], true)}`)).toEqual([1, 2, 3, 4, 4, 4, 9])
  })
})
