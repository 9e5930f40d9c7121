import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { parseQuantity } from '../../src/config/index.ts'
import { halfWidthPerCm, positionPerCm } from '../../src/config/positions.ts'
import { type Dimension, unitsOf } from '../../src/config/quantity.ts'
import { parseTime } from '../../src/config/time.ts'

const read = (text: string, dimension: Dimension) => {
  const reading = parseQuantity(text, dimension)
  return reading.kind === 'read' ? [reading.value, reading.unit] : reading
}

describe('quantities with units', () => {
  // Factors: SI brochure, 9th edition, tables 8 (min, h, d, L) and 2.3.1 (0 degC = 273.15 K)
  test.each([
    ['60 cm^-1', 'wavenumber', [60, 'cm^-1']],
    ['0.3 nm', 'wavelength', [0.3, 'nm']],
    ['0.3 um', 'wavelength', [300, 'nm']],
    ['6 h', 'duration', [21_600_000, 'ms']],
    ['0 d', 'duration', [0, 'ms']],
    ['15 min', 'duration', [900_000, 'ms']],
    ['2 week', 'duration', [1_209_600_000, 'ms']],
    ['40 degC', 'temperature', [40, 'degC']],
    ['10 mm', 'length', [10, 'mm']],
    ['1cm', 'length', [10, 'mm']],
    ['0.012 mol/L', 'concentration', [0.012, 'mol/L']],
    ['12 mmol/L', 'concentration', [0.012, 'mol/L']],
    ['-1.5e-3', 'number', [-0.0015, '1']],
  ] as const)('%s is a %s', (text, dimension, expected) => {
    expect(read(text, dimension)).toEqual(expected)
  })

  test('313.15 K are 40 degC', () => {
    const reading = parseQuantity('313.15 K', 'temperature')
    expect(reading.kind === 'read' && reading.value).toBeCloseTo(40, 9)
  })

  // CODATA 2018 (exact constants): 1 eV corresponds to 8065.543 937... cm^-1
  test('1 eV is 8065.543937 cm^-1', () => {
    const reading = parseQuantity('1 eV', 'wavenumber')
    expect(reading.kind === 'read' && reading.value).toBeCloseTo(8065.543937, 6)
  })

  test('a missing unit is refused and the units that fit are named', () => {
    expect(read('60', 'length')).toEqual({
      kind: 'refused',
      what: '"60" has no unit',
      remedy: 'the units that fit are mm, cm',
    })
  })

  test.each([
    ['60 nm', 'wavenumber', 'cm^-1'],
    ['40 C', 'temperature', 'did you mean degC?'],
    ['6 hours', 'duration', 'did you mean h?'],
    ['12 mM', 'concentration', 'did you mean mmol/L?'],
    ['60 cm-1', 'spectral', 'did you mean cm^-1?'],
    ['0,3 nm', 'wavelength', 'decimal point'],
    ['5 h', 'number', 'leave the unit out'],
    ['-300 degC', 'temperature', 'mend the temperature'],
    ['1e999 s', 'duration', 'smaller'],
    ['5 toString', 'duration', 'the units that fit'],
  ] as const)('%s is no %s: the remedy says %s', (text, dimension, remedy) => {
    expect(parseQuantity(text, dimension)).toMatchObject({ kind: 'refused', remedy: expect.stringContaining(remedy) })
  })

  test('whatever the number and the fitting unit, what is written is read', () => {
    const dimensions: readonly Dimension[] = [
      'duration',
      'length',
      'concentration',
      'wavelength',
      'wavenumber',
      'spectral',
    ]
    fc.assert(
      fc.property(
        fc.constantFrom(...dimensions),
        fc.double({ min: 1e-6, max: 1e6, noNaN: true }),
        fc.nat(9),
        (dimension, value, i) => {
          const units = unitsOf(dimension)
          const reading = parseQuantity(`${value} ${units[i % units.length]}`, dimension)
          return reading.kind === 'read' && reading.value > 0 && Number.isFinite(reading.value)
        },
      ),
    )
  })
})

describe('positions on the spectral axis', () => {
  // Ciddor, Applied Optics 35 (1996) 1566, standard air: 550 nm in vacuum is 549.847232 nm in air
  test('a wavelength is read as measured in air', () => {
    expect(positionPerCm({ value: 549.847232, unit: 'nm' })).toBeCloseTo(1e7 / 550, 3)
  })

  test('15 nm about 512 nm are half the distance between 497 and 527 nm', () => {
    const half = halfWidthPerCm({ value: 512, unit: 'nm' }, { value: 15, unit: 'nm' })
    // 10^7 (1/497 - 1/527)/2 in vacuum; air changes it by its refractivity, 0.03 %
    expect(half).toBeGreaterThan(0.9995 * (1e7 / 497 - 1e7 / 527) * 0.5)
    expect(half).toBeLessThan((1e7 / 497 - 1e7 / 527) * 0.5)
  })

  test('a distance that reaches to zero has no meaning', () => {
    expect(halfWidthPerCm({ value: 512, unit: 'nm' }, { value: 512, unit: 'nm' })).toBeNull()
    expect(halfWidthPerCm({ value: 17400, unit: 'cm^-1' }, { value: 17400, unit: 'cm^-1' })).toBeNull()
  })
})

describe('times', () => {
  // ISO 8601-1:2019; the epoch values are GNU date's: date -u -d TIME +%s
  test.each([
    ['2026-03-02T09:00:00Z', 1_772_442_000_000],
    ['2026-03-02T10:00+01:00', 1_772_442_000_000],
    ['2026-03-02T09:00:00.250Z', 1_772_442_000_250],
  ])('%s', (text, ms) => expect(parseTime(text)).toEqual({ kind: 'read', ms }))

  test.each([
    ['2026-03-02T09:00:00', 'no offset'],
    ['2026-03-02', 'no offset'],
    ['2026-02-30T09:00:00Z', 'on no calendar'],
    ['yesterday', 'no time'],
  ])('%s is refused: %s', (text, what) => {
    expect(parseTime(text)).toMatchObject({ kind: 'refused', what: expect.stringContaining(what) })
  })
})
