import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { OrdinateKind, RawSpectrum } from '../../src/readers/types.ts'
import { prepareSpectrum, wavenumberOfNm } from '../../src/spectrum/index.ts'
import type { PrepareOptions, Spectrum } from '../../src/spectrum/types.ts'

const OPTIONS: PrepareOptions = { medium: 'air', absorbanceLimit: 2, bandwidthNm: 1 }

const raw = (x: readonly number[], y: readonly number[], more: Partial<RawSpectrum> = {}): RawSpectrum => ({
  index: 0,
  x: Float64Array.from(x),
  y: Float64Array.from(y),
  xUnit: 'nm',
  medium: null,
  yKind: 'absorbance',
  sample: null,
  title: null,
  time: null,
  pathMm: null,
  temperatureC: null,
  concentrationMolPerL: null,
  header: {},
  warnings: [],
  ...more,
})

const prepared = (spectrum: RawSpectrum, options: Partial<PrepareOptions> = {}): Spectrum => {
  const outcome = prepareSpectrum(spectrum, { ...OPTIONS, ...options })
  if (outcome.kind === 'refused') throw new Error(outcome.faults[0].what)
  return outcome.spectrum
}

const NM = Array.from({ length: 601 }, (_, i) => 300 + i)
const band = (nm: number): number =>
  0.5 * Math.exp(-(((1e7 / nm - 17400) / 1800) ** 2)) + 0.6 * Math.exp(-(((1e7 / nm - 24600) / 2000) ** 2))

/** Normal deviates from a fixed linear congruential generator and Box–Muller, so that every run sees the same noise. */
const deviates = (n: number, seed = 1): number[] => {
  let state = seed
  const next = () => {
    state = (state * 1664525 + 1013904223) % 4294967296
    return (state + 0.5) / 4294967296
  }
  return Array.from({ length: n }, () => Math.sqrt(-2 * Math.log(next())) * Math.cos(2 * Math.PI * next()))
}

describe('axis', () => {
  it('wavelengths in either direction become the same ascending vacuum wavenumbers', () => {
    const up = prepared(raw(NM, NM.map(band)))
    const down = prepared(raw([...NM].reverse(), NM.map(band).reverse()))
    expect(up.wavenumberPerCm[0]).toBe(wavenumberOfNm(900, 'air'))
    expect(down).toEqual(up)
  })

  it('the order of rows is irrelevant', () => {
    const whole = prepared(raw(NM, NM.map(band)))
    fc.assert(
      fc.property(fc.shuffledSubarray([...NM.keys()], { minLength: 601, maxLength: 601 }), (order) => {
        expect(
          prepared(
            raw(
              order.map((i) => NM[i]!),
              order.map((i) => band(NM[i]!)),
            ),
          ),
        ).toEqual(whole)
      }),
      { numRuns: 5 },
    )
  })

  it('a wavenumber or an energy is a vacuum quantity, a wavelength lies in the medium of the options', () => {
    expect(prepared(raw([20000, 20001], [0.1, 0.2], { xUnit: 'cm^-1' })).wavenumberPerCm[0]).toBe(20000)
    expect(prepared(raw([2, 3], [0.1, 0.2], { xUnit: 'eV' })).wavenumberPerCm[0]).toBeCloseTo(16131.087875, 5)
    expect(prepared(raw([0.5, 0.6], [0.1, 0.2], { xUnit: 'um' }), { medium: 'vacuum' }).wavenumberPerCm[1]).toBe(20000)
    expect(prepared(raw([500, 600], [0.1, 0.2], { medium: 'vacuum' })).wavenumberPerCm[1]).toBe(20000)
  })

  it('a point that stands twice with one value is merged, with two values refused', () => {
    expect(prepared(raw([500, 500, 501], [0.1, 0.1, 0.2])).wavenumberPerCm).toHaveLength(2)
    const outcome = prepareSpectrum(raw([500, 500, 501], [0.1, 0.3, 0.2]), OPTIONS)
    expect(outcome.kind === 'refused' && outcome.faults[0].code).toBe('duplicate-abscissa')
  })

  it.each([
    ['nm', 17.4],
    ['nm', -500],
    ['nm', Number.NaN],
    ['um', 500],
    ['eV', 500],
    ['cm^-1', 0],
  ] as const)('an axis in %s with the value %d is refused', (xUnit, x) => {
    expect(prepareSpectrum(raw([x, x + 1], [0.1, 0.2], { xUnit }), OPTIONS).kind).toBe('refused')
  })

  it('a hole in the axis is flagged once and said', () => {
    const kept = NM.filter((nm) => nm < 500 || nm > 520)
    const spectrum = prepared(raw(kept, kept.map(band)))
    expect(spectrum.flags).toEqual(['gap'])
    expect(spectrum.remarks).toHaveLength(1)
  })
})

describe('ordinate', () => {
  it.each([
    ['transmittance', (a: number) => 10 ** -a, 'absorbance'],
    ['percent-transmittance', (a: number) => 100 * 10 ** -a, 'absorbance'],
    ['reflectance', (f: number) => 1 + f - Math.sqrt(f * f + 2 * f), 'kubelka-munk'],
    ['percent-reflectance', (f: number) => 100 * (1 + f - Math.sqrt(f * f + 2 * f)), 'kubelka-munk'],
    ['kubelka-munk', (f: number) => f, 'kubelka-munk'],
  ] as const)('%s becomes what is fitted', (yKind: OrdinateKind, write, ordinate) => {
    const spectrum = prepared(
      raw(
        NM,
        NM.map((nm) => write(band(nm))),
        { yKind },
      ),
    )
    expect(spectrum.ordinate).toBe(ordinate)
    for (const [i, nm] of NM.entries()) expect(spectrum.absorbance[600 - i]).toBeCloseTo(band(nm), 10)
  })

  it('transmittance of 87 is no fraction: refused, with the word that settles it', () => {
    const outcome = prepareSpectrum(raw([500, 501], [87, 88], { yKind: 'transmittance' }), OPTIONS)
    expect(outcome.kind === 'refused' && outcome.faults[0].remedy).toContain('percent-transmittance')
  })

  it('points above the limit, overflow words and no light at all are masked and flagged', () => {
    const y = NM.map(band)
    y[10] = 2.1
    y[11] = Infinity
    const spectrum = prepared(raw(NM, y))
    expect(spectrum.flags).toContain('saturated')
    expect([spectrum.used[590], spectrum.used[589], spectrum.used[588]]).toEqual([0, 0, 1])
    const dark = prepared(raw([500, 501], [0, 0.4], { yKind: 'transmittance' }))
    expect(dark.flags).toContain('saturated')
    expect([...dark.used]).toEqual([1, 0])
  })

  it('a missing ordinate is masked and flagged as a gap', () => {
    const spectrum = prepared(
      raw(
        NM,
        NM.map((nm) => (nm === 500 ? Number.NaN : band(nm))),
      ),
    )
    expect(spectrum.flags).toEqual(['gap'])
    expect(spectrum.used[400]).toBe(0)
  })

  it('a negative absorbance beyond the noise is flagged and stays in', () => {
    const spectrum = prepared(
      raw(
        NM,
        NM.map((nm) => band(nm) - 0.05),
      ),
    )
    expect(spectrum.flags).toEqual(['negative'])
    expect(spectrum.used.every((u) => u === 1)).toBe(true)
  })
})

describe('noise', () => {
  const draw = deviates(601)
  it('is recovered along the axis where it differs a hundredfold', () => {
    const sigma = (nm: number) => 1e-5 * 10 ** (Math.abs(nm - 600) / 150)
    const spectrum = prepared(
      raw(
        NM,
        NM.map((nm, i) => band(nm) + sigma(nm) * draw[i]!),
      ),
    )
    for (const nm of [320, 400, 500, 600, 700, 800, 880]) {
      const ratio = spectrum.noise[900 - nm]! / sigma(nm)
      expect(ratio).toBeGreaterThan(0.55)
      expect(ratio).toBeLessThan(1.8)
    }
  })

  it('scales with the noise that was put in, and the median over the curve is right within 10 %', () => {
    for (const sigma of [1e-5, 1e-4, 1e-3]) {
      const flat = prepared(
        raw(
          NM,
          NM.map((_, i) => 0.3 + sigma * draw[i]!),
        ),
      )
      const middle = [...flat.noise].sort((a, b) => a - b)[300]!
      expect(Math.abs(middle / sigma - 1)).toBeLessThan(0.1)
    }
  })

  it('grows with absorbance for a detector of constant noise in transmittance', () => {
    const y = NM.map((nm, i) => -Math.log10(10 ** (-2 * band(nm)) + 2e-4 * draw[i]!))
    const spectrum = prepared(raw(NM, y))
    expect(spectrum.noise[900 - 407]! / spectrum.noise[900 - 850]!).toBeGreaterThan(8)
  })

  it('is positive on a computed curve and at least the rounding of a rounded one', () => {
    expect(Math.min(...prepared(raw(NM, NM.map(band))).noise)).toBeGreaterThan(0)
    const rounded = prepared(
      raw(
        NM,
        NM.map((nm) => Math.round(band(nm) * 1000) / 1000),
      ),
    )
    // a uniform error of width q has the standard deviation q/√12 (GUM 4.3.7)
    expect(Math.min(...rounded.noise)).toBeGreaterThanOrEqual(0.001 / Math.sqrt(12) - 1e-12)
  })
})

describe('spikes and steps', () => {
  const draw = deviates(601, 7)
  const measured = NM.map((nm, i) => band(nm) + 2e-4 * draw[i]!)

  it('quiet noise raises no flag', () => {
    for (let seed = 1; seed <= 40; seed++) {
      const d = deviates(601, seed)
      expect(
        prepared(
          raw(
            NM,
            NM.map((nm, i) => band(nm) + 3e-4 * d[i]!),
          ),
        ).flags,
      ).toEqual([])
    }
  })

  it('single spikes of either sign are masked, and nothing else is', () => {
    const y = [...measured]
    y[100]! += 0.02
    y[350]! -= 0.3
    const spectrum = prepared(raw(NM, y))
    expect(spectrum.flags).toEqual(['spike'])
    expect([...spectrum.used.keys()].filter((i) => spectrum.used[i] === 0)).toEqual([250, 500])
  })

  it('a sharp line three points wide is no spike', () => {
    const y = measured.map((v, i) => v + 0.3 * Math.exp(-4 * Math.LN2 * ((i - 236) / 3) ** 2))
    expect(prepared(raw(NM, y)).used.every((u) => u === 1)).toBe(true)
  })

  it('a step where the lamp changes is flagged and masks nothing', () => {
    const spectrum = prepared(
      raw(
        NM,
        measured.map((v, i) => (NM[i]! < 340 ? v + 0.01 : v)),
      ),
    )
    expect(spectrum.flags).toEqual(['lamp-step'])
    expect(spectrum.remarks[0]).toMatch(/3(39|40)/)
    expect(spectrum.used.every((u) => u === 1)).toBe(true)
  })
})
