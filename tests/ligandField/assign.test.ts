import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { findIon } from '../../src/chemistry/ions.ts'
import { type Assignment, assignBands, type Geometry, type ObservedBand } from '../../src/ligandField/index.ts'

/** cm⁻¹, relative height, width cm⁻¹, hint */
type Seen = readonly [at: number, height: number, width?: number, hint?: string]

const assign = (symbol: string, seen: readonly Seen[], geometry: Geometry = 'octahedral'): Assignment => {
  const found = findIon(symbol)
  if (found.kind !== 'found') throw new Error(symbol)
  const bands: ObservedBand[] = seen.map(([positionPerCm, height, widthPerCm = 3500, hint = null]) => ({
    positionPerCm,
    uPositionPerCm: 10,
    widthPerCm,
    height,
    hint,
  }))
  return assignBands(found.ion, geometry, null, bands)
}

const roles = ({ bands }: Pick<Assignment, 'bands'>): readonly (string | null)[] => bands.map(({ role }) => role)

// Maxima are those of published.ts or of the facts beside each case; heights are molar absorptions, in part from memory.
describe('which band is which', () => {
  it('hexaaquachromium: ν1 4T2g, ν2 4T1g(F), and a third in the ultraviolet 4T1g(P)', () => {
    const two = assign('Cr3+', [
      [17400, 13],
      [24600, 15],
    ])
    expect(two.bands).toEqual([
      { role: 'nu1', term: '4T2g' },
      { role: 'nu2', term: '4T1g(F)' },
    ])
    expect(two.probability).toBeGreaterThan(0.7)
    expect(
      roles(
        assign('Cr3+', [
          [17400, 13],
          [24600, 15],
          [37800, 4],
        ]),
      ),
    ).toEqual(['nu1', 'nu2', 'nu3'])
  })
  it('a strong band beyond the d-d bands is charge transfer and has no role', () => {
    expect(
      roles(
        assign('Cr3+', [
          [17400, 13],
          [24600, 15],
          [35000, 600, 6000],
        ]),
      ),
    ).toEqual(['nu1', 'nu2', null])
  })
  it('a faint sharp band below ν1 of chromium(III) is spin-forbidden', () => {
    expect(
      roles(
        assign('Cr3+', [
          [15000, 0.4, 300],
          [17400, 13],
          [24600, 15],
        ]),
      ),
    ).toEqual(['sf1', 'nu1', 'nu2'])
  })
  it('vanadium(III): the second band is T1g(P), never A2g, however many bands are seen', () => {
    expect(
      roles(
        assign('V3+', [
          [17800, 4],
          [25700, 8],
        ]),
      ),
    ).toEqual(['nu1', 'nu3'])
  })
  it('hexaaquanickel: three bands in the order of the terms; without the infrared one they keep their names', () => {
    expect(
      roles(
        assign('Ni2+', [
          [8500, 2],
          [13800, 2],
          [25300, 5],
        ]),
      ),
    ).toEqual(['nu1', 'nu2', 'nu3'])
    expect(
      roles(
        assign('Ni2+', [
          [13800, 2],
          [25300, 5],
        ]),
      ),
    ).toEqual(['nu2', 'nu3'])
  })
  it('tetrachlorocobaltate: what is seen is ν2 and ν3', () => {
    expect(
      roles(
        assign(
          'Co2+',
          [
            [5460, 70],
            [14700, 600],
          ],
          'tetrahedral',
        ),
      ),
    ).toEqual(['nu2', 'nu3'])
  })
  it('hexaamminecobalt(III): 1T1g and 1T2g', () => {
    expect(
      assign('Co3+', [
        [21050, 56],
        [29500, 46],
      ]).bands.map(({ term }) => term),
    ).toEqual(['1T1g', '1T2g'])
  })
  it('a trans complex: 614 nm and the shoulder at 455 nm are halves of 1T1g, with or without 1T2g near 385 nm', () => {
    const halves = [
      [1e7 / 614, 40, 2800],
      [1e7 / 455, 27, 4000],
    ] as const
    for (const seen of [halves, [...halves, [1e7 / 385, 45, 4000] as const]]) {
      const found = assign('Co3+', seen)
      expect(roles(found).slice(0, 2).sort()).toEqual(['nu1a', 'nu1b'])
      expect(found.flags).toContain('split')
      if (seen.length === 3) expect(roles(found)[2]).toBe('nu2')
    }
  })
  it('trans-[CrCl2(en)2]+, 578, 453 and 396 nm: the first two are halves of 4T2g', () => {
    const found = assign('Cr3+', [
      [17301, 25],
      [22075, 22],
      [25253, 35],
    ])
    expect(roles(found)).toEqual(['nu1a', 'nu1b', 'nu2'])
    expect(found.flags).toContain('split')
  })
  it('titanium(III) with a shoulder: both halves of 2Eg, flagged as Jahn-Teller', () => {
    const found = assign('Ti3+', [
      [17400, 4],
      [20100, 5],
    ])
    expect(roles(found)).toEqual(['nu1a', 'nu1b'])
    expect(found.flags).toEqual(expect.arrayContaining(['split', 'jahn-teller']))
  })
  it('hexaaquamanganese(II): five spin-forbidden bands in the order of the table', () => {
    expect(
      roles(
        assign('Mn2+', [
          [18870, 10],
          [23120, 9],
          [25100, 25, 400],
          [27980, 8],
          [29750, 9],
        ]),
      ),
    ).toEqual(['nu1', 'nu2', 'nu3', 'nu4', 'nu5'])
  })
  it('cobalt(II) where A2g and T1g(P) lie close is called ambiguous, with the runner-up', () => {
    const found = assign('Co2+', [
      [16000, 2],
      [19400, 5],
    ])
    expect(found.flags).toContain('ambiguous-assignment')
    expect(found.runnerUp).not.toBeNull()
    expect(found.runnerUp!.probability).toBeLessThanOrEqual(found.probability)
  })
  it("a species' expectation decides where positions alone do not", () => {
    expect(
      roles(
        assign('Co2+', [
          [16000, 2, 3500, 'nu2'],
          [19400, 5, 3500, 'nu3'],
        ]),
      ),
    ).toEqual(['nu2', 'nu3'])
    expect(
      roles(
        assign('Co2+', [
          [16000, 2, 3500, 'nu3'],
          [19400, 5, 3500, 'nu2'],
        ]),
      ),
    ).toEqual(['nu3', 'nu2'])
  })
  it('nothing observed, or an ion without roles, is flagged', () => {
    expect(assign('Cr3+', [])).toEqual({ bands: [], probability: 0, runnerUp: null, flags: ['no-band'] })
    expect(assign('Ni3+', [[17000, 1]]).flags).toEqual(['no-band'])
  })
  it('whatever is seen, each band gets one answer, no role twice, and a probability between 0 and 1', () => {
    const band = fc.tuple(
      fc.double({ min: 4000, max: 50000, noNaN: true }),
      fc.double({ min: 0.001, max: 100, noNaN: true }),
    )
    fc.assert(
      fc.property(
        fc.constantFrom('Cr3+', 'V3+', 'Ni2+', 'Co3+', 'Cu2+'),
        fc.array(band, { minLength: 1, maxLength: 4 }),
        (symbol, seen) => {
          const found = assign(
            symbol,
            [...seen].sort((a, b) => a[0] - b[0]),
          )
          expect(found.bands).toHaveLength(seen.length)
          const given = roles(found).filter((role) => role !== null)
          expect(new Set(given).size).toBe(given.length)
          expect(found.probability).toBeGreaterThan(0)
          expect(found.probability).toBeLessThanOrEqual(1)
        },
      ),
      { numRuns: 40 },
    )
  })
})
