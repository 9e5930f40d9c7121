import { describe, expect, it } from 'vitest'
import { findIon, IONS, type KnownIon } from '../../src/chemistry/ions.ts'
import { averageEnvironment, findLigand, splittingPattern } from '../../src/chemistry/ligands.ts'
import { levels } from '../../src/ligandField/index.ts'

const ionOf = (text: string): KnownIon => {
  const found = findIon(text)
  if (found.kind !== 'found') throw new Error(text)
  return found.ion
}

describe('ions', () => {
  it('are found by every usual spelling', () => {
    for (const text of ['Cr3+', 'cr3+', 'CR3+', 'Cr+3', 'Cr(III)', 'cr(iii)', 'CrIII', 'Cr³⁺', ' Cr 3+ ', 'Cr^3+'])
      expect(ionOf(text).symbol, text).toBe('Cr3+')
  })
  it('carry d = group number − charge', () => {
    const group: Readonly<Record<string, number>> = {
      Ti: 4,
      V: 5,
      Cr: 6,
      Mn: 7,
      Fe: 8,
      Co: 9,
      Ni: 10,
      Cu: 11,
      Mo: 6,
      Ru: 8,
      Rh: 9,
      Ir: 9,
      Pt: 10,
    }
    for (const { symbol, d } of IONS) {
      const [, element, charge] = /^([A-Z][a-z]?)(\d)\+$/.exec(symbol)!
      expect(d, symbol).toBe(group[element!]! - Number(charge))
    }
  })
  it('carry the free-ion B of Jolly, Modern Inorganic Chemistry, and name the alternatives', () => {
    const jolly = {
      'V2+': 755,
      'Cr2+': 810,
      'Mn2+': 860,
      'Fe2+': 917,
      'Co2+': 971,
      'Ni2+': 1030,
      'V3+': 861,
      'Cr3+': 918,
      'Mn3+': 965,
      'Fe3+': 1015,
      'Co3+': 1065,
      'Ni3+': 1115,
    }
    for (const [symbol, b] of Object.entries(jolly)) {
      expect(ionOf(symbol).freeIonBPerCm).toBe(b)
      expect(ionOf(symbol).freeIonBSource).toContain('Jolly')
    }
    expect(ionOf('Cr3+').otherFreeIonBPerCm).toContain(1030)
  })
  it('that are unknown suggest the nearest; empty and full shells say that they have no d-d bands', () => {
    expect(findIon('Cr4+')).toMatchObject({ kind: 'unknown', nearest: 'Cr3+' })
    expect(findIon('Cr')).toMatchObject({ kind: 'unknown', nearest: expect.stringMatching(/^Cr/) })
    expect(findIon('chromium')).toMatchObject({ kind: 'unknown', nearest: null })
    expect(findIon('Zn2+')).toMatchObject({ kind: 'unknown', nearest: null, why: expect.stringContaining('d10') })
    expect(findIon('Ti(IV)')).toMatchObject({ kind: 'unknown', nearest: null, why: expect.stringContaining('d0') })
    expect(findIon('')).toMatchObject({ kind: 'unknown', nearest: null })
  })
})

describe('ligands', () => {
  it('are found with and without their charge', () => {
    expect(findLigand('Cl')?.name).toBe('Cl-')
    expect(findLigand('NO2-')?.name).toBe('NO2-')
    expect(findLigand('ox2-')?.name).toBe('ox')
    expect(findLigand('unobtainium')).toBeNull()
  })
  it("give Jørgensen's estimates for chromium(III): NH3 21750, B 648; en 22272, B 629; CN 29580", () => {
    const estimate = (ligands: Readonly<Record<string, number>>) => averageEnvironment(ionOf('Cr3+'), ligands)
    expect(estimate({ NH3: 6 })).toMatchObject({ kind: 'estimated', places: 6, deltaPerCm: 21750 })
    const ammine = estimate({ NH3: 6 })
    const chelate = estimate({ en: 3 })
    if (ammine.kind !== 'estimated' || chelate.kind !== 'estimated') throw new Error('no estimate')
    expect(Math.round(ammine.bPerCm!)).toBe(648)
    expect(Math.round(chelate.deltaPerCm!)).toBe(22272)
    expect(Math.round(chelate.bPerCm!)).toBe(629)
    expect(chelate.places).toBe(6)
    expect(estimate({ 'CN-': 6 })).toMatchObject({ deltaPerCm: 29580 })
    expect(estimate({ NH3: 5, Xx: 1 })).toEqual({ kind: 'unknown', ligands: ['Xx'] })
  })
  it('Δ rises from fluoride over water and ammonia to cyanide (common practice)', () => {
    const deltas = ['F-', 'H2O', 'NH3', 'CN-'].map((name) => {
      const found = averageEnvironment(ionOf('Cr3+'), { [name]: 6 })
      return found.kind === 'estimated' ? found.deltaPerCm! : Number.NaN
    })
    expect(deltas).toEqual([...deltas].sort((a, b) => a - b))
  })
})

describe('a fourfold axis', () => {
  const chromium = ionOf('Cr3+')
  it('keeps the mean of six places: 10Dq(cubic) = 10Dq − (35/6) Dt is the average environment', () => {
    const pattern = splittingPattern(chromium, 'NH3', ['Cl-', 'H2O'])!
    const mean = averageEnvironment(chromium, { NH3: 4, 'Cl-': 1, H2O: 1 })
    expect(mean.kind === 'estimated' && mean.deltaPerCm).toBeCloseTo(pattern.deltaCubicPerCm, 8)
  })
  it('one unlike ligand splits half as much as two', () => {
    const one = splittingPattern(chromium, 'NH3', ['NH3', 'Cl-'])!
    const two = splittingPattern(chromium, 'NH3', ['Cl-', 'Cl-'])!
    expect(two.dtPerCm / one.dtPerCm).toBeCloseTo(2, 9)
  })
  it('parts the first band of d3 as the full matrices do: 4B2g stays, 4Eg lies (35/4) Dt lower but for mixing', () => {
    const pattern = splittingPattern(chromium, 'NH3', ['NH3', 'Cl-'])!
    const list = levels(chromium, {
      geometry: 'octahedral',
      deltaPerCm: pattern.deltaInPlanePerCm,
      bPerCm: 640,
      cPerCm: 2880,
      dtPerCm: pattern.dtPerCm,
    })
    const at = (label: string): number => list.find((level) => level.label === label && level.index === 1)!.energyPerCm
    expect(at('4B2g')).toBeCloseTo(pattern.deltaInPlanePerCm, 6)
    expect((at('4B2g') - at('4Eg')) / pattern.pairBelowSinglePerCm).toBeCloseTo(1, 1)
  })
})
