import { describe, expect, test } from 'vitest'
import { cautionsFor } from '../../src/chemistry/cautions.ts'
import { checksFor } from '../../src/chemistry/checks.ts'
import { CHLORO } from './species.ts'

const withLigands = (ligands: Record<string, number>, ion = 'Cr3+', title = '') => ({ ...CHLORO, ion, title, ligands })
const said = (species: Parameters<typeof cautionsFor>[0], diagnosis = 'substitution') =>
  cautionsFor(species, diagnosis).join(' ')

describe('cautions (common practice)', () => {
  test('always end with the safety data sheet and local rules', () => {
    for (const species of [null, CHLORO, withLigands({ H2O: 6 }, 'Ti3+')])
      expect(cautionsFor(species, 'unclear').at(-1)).toBe('Your safety data sheet and local rules come first.')
  })

  test('name what acid sets free: hydrogen cyanide, hydrazoic acid, hydrogen fluoride', () => {
    expect(said(withLigands({ 'CN-': 6 }))).toContain('hydrogen cyanide')
    expect(said(withLigands({ 'NCS-': 6 }))).toContain('hydrogen cyanide')
    expect(said(withLigands({ 'N3-': 1, NH3: 5 }))).toContain('hydrazoic acid')
    expect(said(withLigands({ 'F-': 6 }))).toContain('hydrogen fluoride')
    expect(said(withLigands({ MeCN: 6 }))).not.toContain('cyanide')
  })

  test('name chromium(VI), nickel and cobalt', () => {
    expect(said(CHLORO)).toContain('Chromium(VI)')
    expect(said(withLigands({ H2O: 6 }, 'Ni2+'))).toContain('Nickel')
    expect(said(withLigands({ NH3: 6 }, 'Co3+'))).toContain('Cobalt')
    expect(said(withLigands({ H2O: 6 }, 'Cu2+'))).not.toMatch(/Chromium|Nickel|Cobalt/)
  })

  test('name perchlorates only beside ligands that burn', () => {
    expect(said(withLigands({ NH3: 6 }, 'Cr3+', '[Cr(NH3)6](ClO4)3'))).toContain('explode')
    expect(said(withLigands({ en: 3 }, 'Ni2+', 'tris(ethylenediamine)nickel perchlorate'))).toContain('explode')
    expect(said(withLigands({ H2O: 6 }, 'Cr3+', '[Cr(H2O)6](ClO4)3'))).not.toContain('explode')
  })

  test('of an unknown compound say that nothing is known', () => {
    expect(said(null)).toContain('knows none of its hazards')
  })
})

test('nobody is told to filter or warm what may explode, or what nobody knows', () => {
  expect(checksFor(CHLORO, 'unclear').join(' ')).toContain('filtering')
  for (const species of [null, withLigands({ NH3: 6 }, 'Cr3+', '[Cr(NH3)6](ClO4)3'), withLigands({ 'N3-': 1, NH3: 5 })])
    for (const diagnosis of ['unclear', 'substitution', 'wavelength', 'concentration'])
      expect(checksFor(species, diagnosis).join(' ')).not.toMatch(/filter|warm|heat|dry/i)
})
