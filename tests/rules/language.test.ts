import { describe, expect, it } from 'vitest'
import { BEGAN, compiled, faultsOf, HOUR, judged, occasion, reference, windowOf } from './fixtures.ts'

const now = windowOf([{ nu1: 19530, nu2: 26700, b: 648, height1: 0.43, noise: 0.001 }], {
  reference: reference({ nu1: 19500, nu2: 26700 }, { nu1: 3 }),
})
const rings = (when: string, window = now) => expect(judged(when, window), when).toBe('rings')
const clears = (when: string, window = now) => expect(judged(when, window), when).toBe('clears')

describe('arithmetic and comparison', () => {
  it('follows the usual order of operations', () => {
    rings('2 + 3 * 4 == 14')
    rings('-2^2 == -4')
    rings('2^3^2 == 512')
    rings('(2 + 3) * 4 == 20')
    rings('7 - 2 - 1 == 4')
    rings('12 / 3 / 2 == 2')
    rings('2 nu1 == nu1 + nu1')
  })
  it('is exact: a difference of 1e-16 is a difference', () => {
    rings('1e-16 > 0')
    clears('1e-16 == 0')
  })
  it('knows all six comparisons, and chains of them', () => {
    rings('1 < 2 and 2 <= 2 and 3 > 2 and 2 >= 2 and 1 != 2 and 2 == 2')
    rings('19000 cm^-1 < nu1 <= 20000 cm^-1')
    clears('19000 cm^-1 < nu1 < 19500 cm^-1')
    rings('1 < 2 < 3 < 4')
    clears('1 < 2 < 3 < 3')
  })
  it('chooses by a condition', () => {
    rings('(nu1 > nu2 ? 1 : 2) == 2')
    rings('nu1 > nu2 ? nu1 > 0 cm^-1 : nu2 > 0 cm^-1')
  })
  it('computes abs, min, max, sqrt, exp, log and log10', () => {
    rings('abs(nu1 - nu2) == 7170 cm^-1')
    rings('max(1, 3, 2) == 3 and min(3, 1, 2) == 1')
    rings('sqrt(nu1^2) == nu1')
    rings('log(exp(1)) == 1 and log10(1000) == 3')
  })
})

describe('units', () => {
  it('compares like with like whatever the unit', () => {
    rings('1 h == 60 min and 1 day == 24 h and 1 week == 7 d and 60 s == 1 min')
    rings('1 mm == 0.1 cm and 1000 nm == 1 um and 1 µm == 1 μm')
    rings('abs(path - 1 cm) < 0.001 mm')
    rings('abs(concentration - 12 mmol/L) < 1e-9 mol/L')
    rings('temperature > 20 degC and temperature < 300 K')
    rings('2 * 3 mol/L == 6 mol/L')
  })
  it('reads electronvolts as wavenumbers: 1 eV is 8065.543937 cm^-1 (CODATA 2022, exact)', () => {
    rings('abs(1 eV - 8065.543937 cm^-1) < 1e-6 cm^-1')
    rings('nu1 > 2.42 eV and nu1 < 2.43 eV')
  })
  it('takes a zero temperature of the Celsius scale as 273.15 K', () => {
    rings('0 degC == 273.15 K and -5 degC == 268.15 K')
    rings('temperature - 20 degC > 4.9 K')
    rings('max(temperature, 30 degC) == 30 degC')
  })
  it.each([
    ['nu1 > 5 h', 6],
    ['nu1 > 60', 5 - 1],
    ['nu1 > 575 nm', 4],
    ['nu1 + 1 > 3', 4],
    ['u(nu1)^2 > 4 cm^-1', 9],
    ['beta > 1 cm^-1', 5],
    ['exp(nu1) > 1', 4],
    ['nu1 ^ nu2 > 1', 6],
    ['age > 5 cm^-1', 4],
    ['slope(nu1, 5) > 1 cm^-1', 14],
    ['temperature > 5 mol/L', 12],
    ['temperature - reference(temperature) > 2 degC', 36],
    ['sd(temperature, 5) > 1 degC', 19],
    ['2 * temperature > 50 degC', 16],
    ['temperature + temperature > 50 K', 12],
    ['run_above(nu1, 3) > 2', 15],
    ['absorbance(5 h) > 1', 11],
    ['(nu1 > nu2 ? nu1 : beta) > 1', 11],
    ['max(nu1, 3) > 1', 0],
  ])('%s does not fit and is refused at its place', (text) => {
    const [fault] = faultsOf(text)
    expect(fault?.code).toBe('rule-unit')
    expect(fault?.place).toMatchObject({ at: 'rules/trial.yaml', line: 4 })
  })
  it('reports the place of the offending sign', () => {
    const [fault] = faultsOf('nu2 > 1 cm^-1 and (nu1) > 5 h')
    expect(fault?.place.column).toBe(12 + 'nu2 > 1 cm^-1 and (nu1) '.length)
  })
  it.each(['5 1/cm > nu1', 'nu1 > 60/cm', 'nu1 > cm^-1', 'nu1 / h > 3', '3 / 2 h > age', 'nu1 > 60 cm^0.5'])(
    'a unit that follows no number is refused: %s',
    (text) => expect(faultsOf(text).length).toBeGreaterThan(0),
  )
})

describe('names', () => {
  it('win over units of the same letters: b is Racah B', () => {
    rings('b == 648 cm^-1')
  })
  it.each([
    ['nu_1 > 3 cm^-1', 'did you mean nu1?', 0],
    ['delta > 3 cm^-1', 'did you mean delta_o?', 0],
    ['Delta_o > 3 cm^-1', 'did you mean delta_o?', 0],
    ['nu1 > 3 cm^-1 and hieght1 > 1', 'did you mean height1?', 18],
    ['nu1 > 3 hr', 'did you mean h?', 8],
    ['refrence(nu1) > nu1', 'did you mean reference?', 0],
  ])('a misspelt one is refused with what was meant: %s', (text, remedy, offset) => {
    const [fault] = faultsOf(text)
    expect(fault).toMatchObject({ remedy, place: { line: 4, column: 12 + offset } })
  })
  it('of every quantity in the contract are known, whatever computes them', () => {
    const wavenumbers = ['delta_o', 'b', 'c', 'nu1', 'nu6', 'max1', 'max6', 'width1', 'width6']
    const plain = 'beta dq_over_b height1 height6 area_ratio21 scatter rms noise reduced_chi2 delta_e extent offset'
    for (const name of wavenumbers) expect(faultsOf(`${name} > 1 cm^-1`), name).toEqual([])
    for (const name of plain.split(' ')) expect(faultsOf(`${name} > 1`), name).toEqual([])
    expect(faultsOf('temperature > 1 degC and path > 1 mm and concentration > 1 mol/L')).toEqual([])
    expect(faultsOf('age > 1 d and gap > 1 h')).toEqual([])
  })
  it('age counts from the beginning of the study, gap from the occasion before', () => {
    const two = windowOf([{}, {}])
    rings('age == 6 h and gap == 6 h', two)
    expect(judged('gap > 1 h', windowOf([{}]))).toBe('gathering')
    expect(judged('age > 1 h', { ...two, began: null })).toBe('missing')
  })
})

describe('what is no condition', () => {
  it.each([
    'nu1',
    '3',
    'nu1 and nu2',
    'not nu1',
    'not nu1 > nu2',
    '(1 < 2) + 1 > 2',
    '(1 < 2) < 3',
    'nu1 > nu2 ? 1 : 2 > 1',
  ])('is refused: %s', (text) => expect(faultsOf(text).length).toBeGreaterThan(0))
})

describe('functions of one occasion', () => {
  it('absorbance interpolates the spectrum and is missing outside it', () => {
    rings('absorbance(575 nm) == 0.575')
    rings('absorbance(0.575 um) == 0.575')
    expect(judged('absorbance(200 nm) > 0', now)).toBe('missing')
    rings('absorbance(575 nm) - reference(absorbance(575 nm)) > 0.04')
  })
  it('wavelength is in air where the spectrum is: 632.825005 nm for 633 nm in vacuum (Ciddor 1996)', () => {
    const laser = windowOf([{ nu1: 1e7 / 633 }])
    rings('abs(wavelength(nu1) - 632.825005 nm) < 1e-5 nm', laser)
    rings('abs(wavelength(nu1) - 633 nm) < 1e-9 nm', { ...laser, medium: 'vacuum' })
  })
  it('u and u_reference are standard uncertainties', () => {
    const window = { ...now, occasions: [occasion(BEGAN, { nu1: 19530 }, { nu1: 4 })] }
    rings('u(nu1) == 4 cm^-1 and u_reference(nu1) == 3 cm^-1', window)
    rings('abs(nu1 - reference(nu1)) > max(4 * sqrt(u(nu1)^2 + u_reference(nu1)^2), 20 cm^-1)', window)
    clears('abs(nu1 - reference(nu1)) > max(4 * sqrt(u(nu1)^2 + u_reference(nu1)^2), 60 cm^-1)', window)
  })
  it.each([
    'u(age) > 1 h',
    'reference(gap) > 1 h',
    'u(nu1 + nu2) > 1 cm^-1',
    'mean(wavelength(nu1), 3) > 500 nm',
    'mean(nu1) > nu1',
    'mean(nu1, 2.5) > nu1',
    'mean(nu1, 0) > nu1',
    'mean(nu1, nu2) > nu1',
    'slope(nu1, 1) > 1 cm^-1/h',
    'sqrt() > 1',
    'count(-3) > 1',
    'u > 3',
    'min > 3',
  ])('refuse what makes no sense: %s', (text) => expect(faultsOf(text).length).toBeGreaterThan(0))
})

describe('the evidence', () => {
  it('holds every quantity named, with its uncertainty and reference, in its own unit', () => {
    const window = { ...now, occasions: [occasion(BEGAN, { nu1: 19530, temperature: 25.5 }, { nu1: 4 })] }
    const { evidence } = compiled('nu1 - reference(nu1) > 3 cm^-1 and temperature > 20 degC').judge(window)
    expect(evidence).toEqual([
      { name: 'nu1', unit: 'cm^-1', value: 19530, u: 4, reference: 19500, uReference: 3 },
      { name: 'temperature', unit: 'degC', value: 25.5, u: null, reference: null, uReference: null },
    ])
  })
})

describe('the place of a fault', () => {
  it('is told by line in a text of several lines', () => {
    const [fault] = faultsOf('nu1 > 3 cm^-1\nand nux > 3 cm^-1')
    expect(fault?.place).toEqual({ at: 'rules/trial.yaml', line: 5 })
  })
  it('is told for every unknown name at once', () => {
    expect(faultsOf('nux > 3 cm^-1 and nuy > 3 cm^-1').map(({ place }) => place.column)).toEqual([12, 30])
  })
})

it('a rule says how far it looks back', () => {
  expect(compiled('nu1 > 1 cm^-1').lookBack).toBe(1)
  expect(compiled('gap > 1 h').lookBack).toBe(2)
  expect(compiled('mean(nu1, 5) > 1 cm^-1').lookBack).toBeGreaterThanOrEqual(5)
  expect(compiled('mean(nu1, 12 h) > 1 cm^-1').lookBack).toBe(Infinity)
  expect(HOUR).toBe(3600 * 1000)
})
