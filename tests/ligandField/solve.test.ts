import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { findIon } from '../../src/chemistry/ions.ts'
import { levels, type ParameterFit, type Spin, solveParameters, termScheme } from '../../src/ligandField/index.ts'
import type { Geometry, Ion } from '../../src/ligandField/types.ts'

const ionOf = (symbol: string): Ion => {
  const found = findIon(symbol)
  if (found.kind !== 'found') throw new Error(symbol)
  return found.ion
}

type Bands = Readonly<Record<string, number>>

const solve = (
  symbol: string,
  bands: Bands,
  u = 10,
  { geometry = 'octahedral', spin = null }: { geometry?: Geometry; spin?: Spin | null } = {},
): ParameterFit => {
  const list = Object.entries(bands).map(([role, positionPerCm]) => ({ role, positionPerCm }))
  return solveParameters(
    ionOf(symbol),
    geometry,
    spin,
    list,
    list.map((_, i) => list.map((_, j) => (i === j ? u * u : 0))),
  )
}

/** Bands of an ion at given parameters, read from the full list of levels. */
const bandsAt = (
  symbol: string,
  geometry: Geometry,
  spin: Spin | null,
  p: readonly [number, number, number],
  roles: readonly string[],
): Bands => {
  const scheme = termScheme(ionOf(symbol).d, geometry, spin)!
  const list = levels(ionOf(symbol), { geometry, deltaPerCm: p[0], bPerCm: p[1], cPerCm: p[2] })
  const g = geometry === 'octahedral' ? 'g' : ''
  const at = ({ multiplicity, irrep, index }: { multiplicity: number; irrep: string; index: number }): number =>
    list.find((level) => level.label === `${multiplicity}${irrep}${g}` && level.index === index)!.energyPerCm
  return Object.fromEntries(
    roles.map((role) => {
      const { upper } = scheme.transitions.find((transition) => transition.role === role)!
      return [role, at(upper[0]!) - at(scheme.ground)]
    }),
  )
}

describe('Δ and B from bands', () => {
  it('of [Cr(H2O)6]3+ from ν1 and ν2 are 17400 and the closed form 728.6, with β against 918', () => {
    const fit = solve('Cr3+', { nu1: 17400, nu2: 24600 })
    expect(fit).toMatchObject({ ion: 'Cr3+', d: 3, spin: null, bandsUsed: ['nu1', 'nu2'], cPerCm: null, flags: [] })
    expect(fit.deltaPerCm).toBeCloseTo(17400, 6)
    const b = (2 * 17400 ** 2 + 24600 ** 2 - 3 * 17400 * 24600) / (15 * 24600 - 27 * 17400)
    expect(fit.bPerCm).toBeCloseTo(b, 6)
    expect(fit.betaFreeIonBPerCm).toBe(918)
    expect(fit.beta).toBeCloseTo(b / 918, 9)
    expect(fit.dqOverB).toBeCloseTo(1740 / b, 9)
    expect(fit.uDeltaPerCm).toBeCloseTo(10, 6)
  })
  it('of the T1 ground: B = [−a + √(T1P² + T2·T1P − T2²)]/30 with a = 2T2 − T1P, Δ = a + 15B', () => {
    for (const [symbol, t2, t1p] of [
      ['V3+', 17800, 25700],
      ['Co2+', 8100, 19400],
    ] as const) {
      const a = 2 * t2 - t1p
      const b = (-a + Math.sqrt(t1p ** 2 + t2 * t1p - t2 ** 2)) / 30
      const fit = solve(symbol, { nu1: t2, nu3: t1p })
      expect(fit.bPerCm).toBeCloseTo(b, 6)
      expect(fit.deltaPerCm).toBeCloseTo(a + 15 * b, 6)
    }
  })
  it('from ν2 and ν3 of d3: two solutions where ν3/ν2 is between 1.554 and 2, none below, the physical one taken', () => {
    const s = 24600 + 41820
    const p = 24600 * 41820
    const roots = [-1, 1].map((sign) => (9 * s + sign * Math.sqrt(81 * s * s - 340 * p)) / 34)
    const fit = solve('Cr3+', { nu2: 24600, nu3: 41820 })
    expect(fit.deltaPerCm).toBeCloseTo(roots[1]!, 4)
    expect(fit.alternatives).toHaveLength(1)
    expect(fit.alternatives![0]!.deltaPerCm).toBeCloseTo(roots[0]!, 4)
    const below = solve('Cr3+', { nu2: 24600, nu3: 24600 * 1.55 })
    expect(below).toMatchObject({ deltaPerCm: null, bPerCm: null })
    expect(below.flags).toContain('impossible-ratio')
  })
  it('ν2/ν1 of d3 above 1.8 is impossible, and says so', () => {
    const fit = solve('Cr3+', { nu1: 17400, nu2: 17400 * 1.81 })
    expect(fit).toMatchObject({ deltaPerCm: null, bPerCm: null, uBPerCm: null })
    expect(fit.flags).toContain('impossible-ratio')
    expect(fit.remarks.join()).toContain('assignment')
  })
  it('one band gives Δ where it is Δ, and nothing where it is not', () => {
    const chromium = solve('Cr3+', { nu1: 17400 })
    expect(chromium.deltaPerCm).toBeCloseTo(17400, 6)
    expect(chromium).toMatchObject({ bPerCm: null, uBPerCm: null, flags: ['single-band'] })
    expect(solve('V3+', { nu1: 17800 })).toMatchObject({ deltaPerCm: null, bPerCm: null, flags: ['single-band'] })
    const titanium = solve('Ti3+', { nu1: 20300 })
    expect(titanium.deltaPerCm).toBeCloseTo(20300, 6)
    expect(titanium.flags).toEqual(['jahn-teller', 'single-band'])
  })
  it('hexaaquanickel from ν1, ν2 holds B to 71 only (ν known to 100), the fluoride (ratio near 1.8) far worse', () => {
    const aqua = solve('Ni2+', { nu1: 8500, nu2: 13800 }, 100)
    expect(aqua.bPerCm).toBeCloseTo(753.8, 0)
    expect(aqua.uBPerCm! / 71).toBeCloseTo(1, 1)
    expect(aqua.flags).toContain('ill-conditioned')
  })
  it('low-spin d6: ν1 is not Δ; C/B from the table widens u(Δ) to its share, about 200 cm⁻¹ per half a unit, and hardly u(B)', () => {
    const fit = solve('Co3+', { nu1: 21050, nu2: 29550 })
    expect(fit.spin).toBe('low')
    expect(fit.flags).toContain('c-from-table')
    expect(fit.deltaPerCm! - 21050).toBeGreaterThan(1500)
    expect(fit.uDeltaPerCm!).toBeGreaterThan(80)
    expect(fit.uDeltaPerCm!).toBeLessThan(160)
    expect(fit.uBPerCm!).toBeLessThan(5)
  })
  it('a split band enters with the mean weighted by degeneracy, its errors with it', () => {
    const split = solve('Co3+', { nu1a: 16287, nu1b: 21978, nu2: 26000 })
    const mean = solve('Co3+', { nu1: (2 * 16287 + 21978) / 3, nu2: 26000 })
    expect(split.flags).toContain('split')
    expect(split.bPerCm).toBeCloseTo(mean.bPerCm!, 5)
    expect(split.uBPerCm!).toBeLessThan(mean.uBPerCm!)
  })
  it('an error common to all bands widens Δ and cancels from B where only differences matter', () => {
    const bands = [
      { role: 'nu1', positionPerCm: 17400 },
      { role: 'nu2', positionPerCm: 24600 },
    ]
    const own = solveParameters(ionOf('Cr3+'), 'octahedral', null, bands, [
      [100, 0],
      [0, 100],
    ])
    const common = solveParameters(ionOf('Cr3+'), 'octahedral', null, bands, [
      [200, 100],
      [100, 200],
    ])
    expect(common.uDeltaPerCm).toBeCloseTo(Math.sqrt(200), 6)
    expect(common.uBPerCm! / own.uBPerCm!).toBeLessThan(Math.sqrt(200) / 10)
  })
  it('three bands that the model misses say so, and u(B) covers the B of the two lower bands within two of it', () => {
    const three = solve('Cr3+', { nu1: 14900, nu2: 22700, nu3: 34400 })
    expect(three.flags).toContain('misfit')
    expect(three.degreesOfFreedom).toBe(1)
    expect(Math.abs(three.bPerCm! - 896)).toBeLessThan(2 * three.uBPerCm!)
  })
  it('a covariance that is none leaves the uncertainties null and says why', () => {
    const fit = solveParameters(
      ionOf('Cr3+'),
      'octahedral',
      null,
      [
        { role: 'nu1', positionPerCm: 17400 },
        { role: 'nu2', positionPerCm: 24600 },
      ],
      [
        [0, 0],
        [0, 0],
      ],
    )
    expect(fit.bPerCm).toBeCloseTo(728.6, 1)
    expect(fit.uBPerCm).toBeNull()
    expect(fit.flags).toContain('ill-conditioned')
  })
  it('bands without a role of the ion, low-spin ions without a table and positions that are none give null and a remark', () => {
    for (const fit of [
      solve('Cr3+', {}),
      solve('Cr3+', { nu9: 17000 }),
      solve('Fe3+', { nu1: 17000 }, 10, { spin: 'low' }),
      solve('Cr3+', { nu1: Number.NaN, nu2: 3 }),
    ]) {
      expect(fit).toMatchObject({ deltaPerCm: null, bPerCm: null })
      expect(fit.flags).toContain('no-band')
      expect(fit.remarks.length).toBeGreaterThan(0)
    }
  })
})

/** Δ/B; d5 and d6 must stay on their side of the crossover, beyond it some bands from the supposed ground term are negative. */
const RANGES = {
  octahedral: { min: 14, max: 32 },
  tetrahedral: { min: 4, max: 12 },
  weak: { min: 7, max: 17 },
  strong: { min: 22, max: 45 },
}

describe('what was put in comes out', () => {
  const cases: readonly (readonly [string, Geometry, Spin | null, readonly string[], boolean])[] = [
    ['Cr3+', 'octahedral', null, ['nu1', 'nu2'], false],
    ['Cr3+', 'octahedral', null, ['nu1', 'nu2', 'nu3'], false],
    ['Cr3+', 'octahedral', null, ['nu1', 'nu2', 'sf1', 'sf3'], true],
    ['V3+', 'octahedral', null, ['nu1', 'nu3'], false],
    ['Co2+', 'octahedral', 'high', ['nu1', 'nu2', 'nu3'], false],
    ['Co2+', 'tetrahedral', null, ['nu2', 'nu3', 'nu1'], false],
    ['Ni2+', 'octahedral', null, ['nu1', 'nu2', 'nu3'], false],
    ['Ni2+', 'tetrahedral', null, ['nu1', 'nu3'], false],
    ['Mn2+', 'octahedral', 'high', ['nu1', 'nu2', 'nu3', 'nu4', 'nu5', 'nu6'], true],
    ['Co3+', 'octahedral', 'low', ['nu1', 'nu2', 'sf1'], true],
  ]
  for (const [symbol, geometry, spin, roles, withC] of cases)
    it(`${symbol} ${geometry} from ${roles.join(', ')}`, () => {
      fc.assert(
        fc.property(
          fc.double({ ...RANGES[symbol === 'Mn2+' ? 'weak' : spin === 'low' ? 'strong' : geometry], noNaN: true }),
          fc.double({ min: 400, max: 900, noNaN: true }),
          fc.double({ min: 3.6, max: 5.4, noNaN: true }),
          (x, b, ratio) => {
            const p = [x * b, b, ratio * b] as const
            const fit = solve(symbol, bandsAt(symbol, geometry, spin, p, roles), 10, { geometry, spin })
            const all = [fit, ...(fit.alternatives ?? [])]
            const near = all.some(
              ({ deltaPerCm, bPerCm, cPerCm }) =>
                Math.abs(deltaPerCm! / p[0] - 1) < 1e-5 &&
                Math.abs(bPerCm! / p[1] - 1) < 1e-5 &&
                (!withC || Math.abs(cPerCm! / p[2] - 1) < 1e-5),
            )
            expect(
              near,
              `${x} ${b} ${ratio} ${JSON.stringify(all.map((one) => [one.deltaPerCm, one.bPerCm, one.cPerCm]))}`,
            ).toBe(true)
          },
        ),
        { numRuns: 25 },
      )
    })
  it('scaling the bands scales Δ and B; their order is irrelevant', () => {
    fc.assert(
      fc.property(fc.double({ min: 0.6, max: 1.6, noNaN: true }), (s) => {
        const one = solve('Cr3+', { nu1: 17400, nu2: 24600, nu3: 37800 }, 100)
        const scaled = solve('Cr3+', { nu3: s * 37800, nu2: s * 24600, nu1: s * 17400 }, s * 100)
        expect(scaled.deltaPerCm! / one.deltaPerCm!).toBeCloseTo(s, 8)
        expect(scaled.bPerCm! / one.bPerCm!).toBeCloseTo(s, 8)
        expect(scaled.uBPerCm! / one.uBPerCm!).toBeCloseTo(s, 4)
      }),
      { numRuns: 20 },
    )
  })
  it('whatever the bands, no number is NaN or negative and every null has a flag', () => {
    const position = fc.double({ min: 1, max: 60000, noNaN: true })
    fc.assert(
      fc.property(
        fc.constantFrom('Cr3+', 'V3+', 'Ni2+', 'Co3+', 'Co2+', 'Mn2+'),
        fc.tuple(position, position, position),
        fc.double({ min: 0.1, max: 500, noNaN: true }),
        (symbol, [nu1, nu2, nu3], u) => {
          const fit = solve(symbol, symbol === 'Co3+' ? { nu1, nu2 } : { nu1, nu2, nu3 }, u)
          for (const x of [fit.deltaPerCm, fit.bPerCm, fit.uDeltaPerCm, fit.uBPerCm])
            if (x !== null) expect(x).toBeGreaterThanOrEqual(0)
          if (fit.bPerCm === null) expect(fit.flags.length).toBeGreaterThan(0)
        },
      ),
      { numRuns: 150 },
    )
  })
})

/** Normal deviates from a fixed seed (Box–Muller over a linear congruence): the same draws every time. */
const draws = (): (() => number) => {
  let state = 12345
  const uniform = (): number => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0
    return (state + 0.5) / 2 ** 32
  }
  return () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform())
}

describe('uncertainty against 10,000 draws', () => {
  const scatter = (symbol: string, bands: Bands, u: number): { delta: number[]; b: number[] } => {
    const normal = draws()
    const delta: number[] = []
    const b: number[] = []
    for (let i = 0; i < 10000; i += 1) {
      const drawn = Object.fromEntries(Object.entries(bands).map(([role, at]) => [role, at + u * normal()]))
      const fit = solve(symbol, drawn, 1)
      if (fit.bPerCm === null) continue
      delta.push(fit.deltaPerCm!)
      b.push(fit.bPerCm)
    }
    return { delta, b }
  }
  const sd = (x: readonly number[]): number => {
    const mean = x.reduce((sum, v) => sum + v, 0) / x.length
    return Math.sqrt(x.reduce((sum, v) => sum + (v - mean) ** 2, 0) / (x.length - 1))
  }
  for (const [symbol, bands, u] of [
    ['Cr3+', { nu1: 17400, nu2: 24600 }, 20],
    ['V3+', { nu1: 17800, nu3: 25700 }, 40],
  ] as const)
    it(`u(Δ) and u(B) of ${symbol} from ${Object.keys(bands).join(', ')} agree within 3 %`, () => {
      const fit = solve(symbol, bands, u)
      expect(fit.uBPerCm! / fit.bPerCm!).toBeLessThan(0.02)
      const { delta, b } = scatter(symbol, bands, u)
      expect(Math.abs(fit.uDeltaPerCm! / sd(delta) - 1)).toBeLessThan(0.03)
      expect(Math.abs(fit.uBPerCm! / sd(b) - 1)).toBeLessThan(0.03)
    })
  it('d8 without ν3: the profile interval of B holds the middle 68.3 % of the draws within 5 % of its width', () => {
    const bands = { nu1: 8500, nu2: 13800 }
    const [low, high] = solve('Ni2+', bands, 100).intervalBPerCm!
    const b = scatter('Ni2+', bands, 100).b.sort((x, y) => x - y)
    const quantile = (q: number): number => b[Math.floor(q * b.length)]!
    expect(Math.abs(low! - quantile(0.15866))).toBeLessThan(0.05 * (high! - low!))
    expect(Math.abs(high! - quantile(0.84134))).toBeLessThan(0.05 * (high! - low!))
  })
})
