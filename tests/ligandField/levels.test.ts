import fc from 'fast-check'
import { EigenvalueDecomposition, Matrix } from 'ml-matrix'
import { describe, expect, it } from 'vitest'
import { FaultError } from '../../src/fault.ts'
import { eigensystem, eigenvalues } from '../../src/ligandField/eigen.ts'
import { crossovers, type Field, type Level, levels } from '../../src/ligandField/index.ts'
import { bruteEnergies } from './bruteForce.ts'

const octahedral = (deltaPerCm: number, bPerCm: number, cPerCm: number): Field => ({
  geometry: 'octahedral',
  deltaPerCm,
  bPerCm,
  cPerCm,
})

const energy = (list: readonly Level[], label: string, index = 1): number =>
  list.find((level) => level.label === label && level.index === index)!.energyPerCm

const spread = (list: readonly Level[]): readonly number[] =>
  list.flatMap(({ degeneracy, energyPerCm }) => Array<number>(degeneracy).fill(energyPerCm)).sort((a, b) => a - b)

const worst = (a: readonly number[], b: readonly number[]): number => {
  expect(a.length).toBe(b.length)
  return a.reduce((most, x, i) => Math.max(most, Math.abs(x - b[i]!)), 0)
}

// Racah, Phys. Rev. 62 (1942) 438 and 63 (1943) 367, as tabulated in Griffith, The Theory of Transition-Metal Ions
// (1961), table 4.6 (d4 and d5 from memory; the brute-force diagonalisation below confirms them). Racah's A left out.
const B = 917
const C = 4016
const root = (b2: number, bc: number, c2: number): number => Math.sqrt(b2 * B * B + bc * B * C + c2 * C * C)
const FREE_ION: Readonly<Record<number, Readonly<Record<string, number>>>> = {
  2: { '3F': -8 * B, '3P': 7 * B, '1G': 4 * B + 2 * C, '1D': -3 * B + 2 * C, '1S': 14 * B + 7 * C },
  3: {
    '4F': -15 * B,
    '4P': 0,
    '2H': -6 * B + 3 * C,
    '2P': -6 * B + 3 * C,
    '2G': -11 * B + 3 * C,
    '2F': 9 * B + 3 * C,
    '2D+': 5 * B + 5 * C + root(193, 8, 4),
    '2D-': 5 * B + 5 * C - root(193, 8, 4),
  },
  4: {
    '5D': -21 * B,
    '3H': -17 * B + 4 * C,
    '3G': -12 * B + 4 * C,
    '3D': -5 * B + 4 * C,
    '3F+': -5 * B + 5.5 * C + 1.5 * root(68, 4, 1),
    '3F-': -5 * B + 5.5 * C - 1.5 * root(68, 4, 1),
    '3P+': -5 * B + 5.5 * C + 0.5 * root(912, -24, 9),
    '3P-': -5 * B + 5.5 * C - 0.5 * root(912, -24, 9),
    '1I': -15 * B + 6 * C,
    '1F': 6 * C,
    '1G+': -5 * B + 7.5 * C + 0.5 * root(708, -12, 9),
    '1G-': -5 * B + 7.5 * C - 0.5 * root(708, -12, 9),
    '1D+': 9 * B + 7.5 * C + 1.5 * root(144, 8, 1),
    '1D-': 9 * B + 7.5 * C - 1.5 * root(144, 8, 1),
    '1S+': 10 * B + 10 * C + 2 * root(193, 8, 4),
    '1S-': 10 * B + 10 * C - 2 * root(193, 8, 4),
  },
  5: {
    '6S': -35 * B,
    '4G': -25 * B + 5 * C,
    '4F': -13 * B + 7 * C,
    '4D': -18 * B + 5 * C,
    '4P': -28 * B + 7 * C,
    '2I': -24 * B + 8 * C,
    '2H': -22 * B + 10 * C,
    '2G1': -13 * B + 8 * C,
    '2G2': 3 * B + 10 * C,
    '2F1': -9 * B + 8 * C,
    '2F2': -25 * B + 10 * C,
    '2D1': -4 * B + 10 * C,
    '2D+': -3 * B + 11 * C + 3 * root(57, 2, 1),
    '2D-': -3 * B + 11 * C - 3 * root(57, 2, 1),
    '2P': 20 * B + 10 * C,
    '2S': -3 * B + 8 * C,
  },
}
const L = 'SPDFGHI'

describe('levels without a field', () => {
  for (const n of [2, 3, 4, 5])
    it(`of d${n} are the free-ion terms of Racah's expressions to 1e-9`, () => {
      const terms = FREE_ION[n]!
      const expected = Object.entries(terms)
        .flatMap(([name, e]) => Array<number>((2 * L.indexOf(name[1]!) + 1) * Number(name[0])).fill(e))
        .sort((a, b) => a - b)
      const list = spread(levels(n, octahedral(0, B, C)))
      const lowest = expected[0]!
      expect(
        worst(
          list,
          expected.map((e) => e - lowest),
        ) / B,
      ).toBeLessThan(1e-9)
    })
})

describe('the undivided matrix of an independent computation has the same eigenvalues', () => {
  // cm⁻¹; unremarkable points
  for (const [n, delta, b, c] of [
    [2, 17231, 640, 2790],
    [3, 16417, 713, 3105],
    [4, 14139, 871, 3623],
    [6, 21973, 583, 2711],
    [7, 9377, 853, 3911],
    [8, 8641, 927, 4271],
  ] as const)
    it(`d${n} at Δ ${delta}, B ${b}, C ${c}`, () => {
      const brute = bruteEnergies(n, { delta, B: b, C: c })
      expect(
        worst(
          spread(levels(n, octahedral(delta, b, c))),
          brute.map((e) => e - brute[0]!),
        ) / b,
      ).toBeLessThan(1e-9)
    })
  it('d5 at Δ 11239, B 761, C 3371', () => {
    const brute = bruteEnergies(5, { delta: 11239, B: 761, C: 3371 })
    expect(
      worst(
        spread(levels(5, octahedral(11239, 761, 3371))),
        brute.map((e) => e - brute[0]!),
      ) / 761,
    ).toBeLessThan(1e-9)
  })
  it('d3 and d8 in a tetragonal field', () => {
    for (const n of [3, 8]) {
      const field = { ...octahedral(15731, 689, 3011), dsPerCm: 317, dtPerCm: -211 }
      const brute = bruteEnergies(n, { delta: 15731, B: 689, C: 3011, ds: 317, dt: -211 })
      expect(
        worst(
          spread(levels(n, field)),
          brute.map((e) => e - brute[0]!),
        ) / 689,
      ).toBeLessThan(1e-9)
    }
  })
  it('d2, d3 and d6 in a trigonal field, quantised along the threefold axis there', () => {
    for (const n of [2, 3, 6]) {
      const field = { ...octahedral(15731, 689, 3011), dSigmaPerCm: 317, dTauPerCm: -211 }
      const brute = bruteEnergies(n, { delta: 15731, B: 689, C: 3011, ds: 317, dt: -211, axis: 'threefold' })
      expect(
        worst(
          spread(levels(n, field)),
          brute.map((e) => e - brute[0]!),
        ) / 689,
      ).toBeLessThan(1e-9)
    }
  })
  it('d2, d3 and d7 with spin-orbit coupling, octahedral and tetrahedral', () => {
    for (const n of [2, 3, 7])
      for (const geometry of ['octahedral', 'tetrahedral'] as const) {
        const field = { ...octahedral(9187, 771, 3319), geometry, zetaPerCm: 467 }
        const brute = bruteEnergies(n, { delta: geometry === 'octahedral' ? 9187 : -9187, B: 771, C: 3319, zeta: 467 })
        expect(
          worst(
            spread(levels(n, field)),
            brute.map((e) => e - brute[0]!),
          ) / 771,
        ).toBeLessThan(1e-9)
      }
  })
})

describe('closed forms hold to 1e-8', () => {
  const points = [
    [17400, 725, 3262],
    [8500, 905, 4100],
    [30100, 411, 1990],
  ] as const
  it('A2 ground: d3 and d8 octahedral, d2 and d7 tetrahedral', () => {
    for (const [d, geometry, g] of [
      [3, 'octahedral', 'g'],
      [8, 'octahedral', 'g'],
      [2, 'tetrahedral', ''],
      [7, 'tetrahedral', ''],
    ] as const)
      for (const [delta, b, c] of points) {
        const list = levels(d, { ...octahedral(delta, b, c), geometry })
        const spin = d === 3 || d === 7 ? 4 : 3
        const from = energy(list, `${spin}A2${g}`) // past a crossover it is not the ground level
        const r = Math.sqrt((9 * b - delta) ** 2 + 144 * b * b)
        expect(energy(list, `${spin}T2${g}`) - from).toBeCloseTo(delta, 8)
        expect(energy(list, `${spin}T1${g}`) - from).toBeCloseTo((15 * b + 3 * delta - r) / 2, 8)
        expect(energy(list, `${spin}T1${g}`, 2) - from).toBeCloseTo((15 * b + 3 * delta + r) / 2, 8)
      }
  })
  it('T1 ground: d2 and high-spin d7 octahedral', () => {
    for (const [d, spin] of [
      [2, 3],
      [7, 4],
    ] as const)
      for (const [delta, b, c] of points) {
        const list = levels(d, octahedral(delta, b, c))
        const from = energy(list, `${spin}T1g`)
        const r = Math.sqrt(delta ** 2 + 18 * delta * b + 225 * b * b)
        const t2 = (delta - 15 * b + r) / 2
        expect(energy(list, `${spin}T2g`) - from).toBeCloseTo(t2, 8)
        expect(energy(list, `${spin}A2g`) - from).toBeCloseTo(t2 + delta, 8)
        expect(energy(list, `${spin}T1g`, 2) - from).toBeCloseTo(r, 8)
      }
  })
  it('high-spin d5: 4A1 = 4E = 10B + 5C and 4E(D) = 17B + 5C at any Δ', () => {
    for (const delta of [0.5, 4000, 12000]) {
      const list = levels(5, octahedral(delta, 860, 3850))
      expect(energy(list, '4A1g')).toBeCloseTo(10 * 860 + 5 * 3850, 8)
      expect(energy(list, '4Eg')).toBeCloseTo(10 * 860 + 5 * 3850, 8)
      expect(energy(list, '4Eg', 2)).toBeCloseTo(17 * 860 + 5 * 3850, 8)
    }
  })
  it('one electron in D4h: b1 6Dq+2Ds−Dt, a1 6Dq−2Ds−6Dt, b2 −4Dq+2Ds−Dt, e −4Dq−Ds+4Dt', () => {
    const [dq, ds, dt] = [1740, 310, 190]
    const list = levels(1, { ...octahedral(10 * dq, 0, 0), dsPerCm: ds, dtPerCm: dt })
    const e = {
      '2B1g': 6 * dq + 2 * ds - dt,
      '2A1g': 6 * dq - 2 * ds - 6 * dt,
      '2B2g': -4 * dq + 2 * ds - dt,
      '2Eg': -4 * dq - ds + 4 * dt,
    }
    const ground = Math.min(...Object.values(e))
    for (const [label, value] of Object.entries(e)) expect(energy(list, label)).toBeCloseTo(value - ground, 8)
  })
  it('one electron in D3d: a1 −4Dq−2Dσ−6Dτ, and e of the 2 × 2 matrix with (√2/3)(3Dσ−5Dτ)', () => {
    // Ballhausen's trigonal matrix, from memory
    const [dq, sigma, tau] = [1740, 410, -130]
    const list = levels(1, { ...octahedral(10 * dq, 0, 0), dSigmaPerCm: sigma, dTauPerCm: tau })
    const t2 = -4 * dq + sigma + (2 / 3) * tau
    const e = 6 * dq + (7 / 3) * tau
    const mix = (Math.SQRT2 / 3) * (3 * sigma - 5 * tau)
    const half = Math.hypot((e - t2) / 2, mix)
    const all = { a: -4 * dq - 2 * sigma - 6 * tau, e1: (e + t2) / 2 - half, e2: (e + t2) / 2 + half }
    const ground = Math.min(...Object.values(all))
    expect(energy(list, '2A1g')).toBeCloseTo(all.a - ground, 8)
    expect(energy(list, '2Eg', 1)).toBeCloseTo(all.e1 - ground, 8)
    expect(energy(list, '2Eg', 2)).toBeCloseTo(all.e2 - ground, 8)
  })
  it('d3 in D4h: 4B1 → 4B2 is 10Dq exactly', () => {
    const list = levels(3, { ...octahedral(21000, 650, 2900), dsPerCm: 260, dtPerCm: 340 })
    expect(energy(list, '4B2g') - energy(list, '4B1g')).toBeCloseTo(21000, 8)
  })
})

describe('symmetry', () => {
  it('holes in a tetrahedron are electrons in an octahedron: dⁿ(Oh) = d¹⁰⁻ⁿ(Td), label by label', () => {
    for (let n = 1; n <= 9; n += 1) {
      const field = octahedral(13370, 733, 3190)
      const holes = levels(10 - n, { ...field, geometry: 'tetrahedral' })
      for (const { label, index, energyPerCm } of levels(n, field))
        expect(energy(holes, label.replace('g', ''), index)).toBeCloseTo(energyPerCm, 7)
    }
  })
  it('descent to D4h and D3d with a vanishing distortion keeps every energy and degeneracy', () => {
    for (let n = 1; n <= 9; n += 1) {
      const field = octahedral(13370, 733, 3190)
      const oh = spread(levels(n, field))
      expect(worst(spread(levels(n, { ...field, dsPerCm: 1e-9 })), oh)).toBeLessThan(1e-7)
      expect(worst(spread(levels(n, { ...field, dSigmaPerCm: 1e-9 })), oh)).toBeLessThan(1e-7)
    }
  })
  it('descent in symmetry relabels T1 as A2 + E, T2 as B2 + E (D4h) or A1 + E (D3d)', () => {
    const field = octahedral(17400, 725, 3262)
    const oh = levels(3, field)
    const d4 = levels(3, { ...field, dsPerCm: 1e-9 })
    const d3 = levels(3, { ...field, dSigmaPerCm: 1e-9 })
    expect(energy(d4, '4B2g')).toBeCloseTo(energy(oh, '4T2g'), 6)
    expect(energy(d4, '4Eg', 1)).toBeCloseTo(energy(oh, '4T2g'), 6)
    expect(energy(d4, '4A2g', 1)).toBeCloseTo(energy(oh, '4T1g'), 6)
    expect(energy(d3, '4A1g', 1)).toBeCloseTo(energy(oh, '4T2g'), 6)
    expect(energy(d3, '4A2g', 2)).toBeCloseTo(energy(oh, '4T1g'), 6)
  })
  it('spin-orbit coupling of one electron: ²D parts by 5ζ/2, t2 in a strong field into Γ8 and Γ7 by 3ζ/2', () => {
    const free = levels(1, { ...octahedral(0, 0, 0), zetaPerCm: 100 })
    expect(free.at(-1)!.energyPerCm).toBeCloseTo(250, 9)
    const strong = levels(1, { ...octahedral(1e8, 0, 0), zetaPerCm: 100 })
    expect(strong.slice(0, 2).map(({ label }) => label)).toEqual(['Γ8', 'Γ7'])
    expect(strong[1]!.energyPerCm).toBeCloseTo(150, 3)
  })
  it('a vanishing spin-orbit coupling changes no energy and splits each term as its double group says', () => {
    // 4A2 → Γ8; 4T2 → Γ6 + Γ7 + 2Γ8 (Griffith, from memory)
    const list = levels(3, { ...octahedral(17400, 725, 3262), zetaPerCm: 1e-6 })
    expect(list[0]!.label).toBe('Γ8')
    const t2 = list.filter(({ energyPerCm }) => Math.abs(energyPerCm - 17400) < 1e-3).map(({ label }) => label)
    expect(t2.sort()).toEqual(['Γ6', 'Γ7', 'Γ8', 'Γ8'])
  })
})

describe('ground state', () => {
  it('changes spin where two independent diagonalisations put it: d4 27.34, d5 28.29, d6 20.02, d7 21.69', () => {
    for (const [d, ratio, place, from, to] of [
      [4, 4.61, 27.34, '5Eg', '3T1g'],
      [5, 4.477, 28.29, '6A1g', '2T2g'],
      [6, 4.8, 20.02, '5T2g', '1A1g'],
      [7, 4.633, 21.69, '4T1g', '2Eg'],
    ] as const) {
      const [change] = crossovers(d, 'octahedral', ratio, 40)
      expect(change).toMatchObject({ from, to })
      expect(change!.deltaOverB).toBeCloseTo(place, 2)
    }
  })
  it('never changes for d2, d3 and d8 in an octahedron', () => {
    for (const d of [2, 3, 8]) expect(crossovers(d, 'octahedral', 4.5, 50)).toEqual([])
  })
})

describe('properties of every field', () => {
  const field = fc.record({
    deltaPerCm: fc.double({ min: 0, max: 40000, noNaN: true }),
    bPerCm: fc.double({ min: 1, max: 1300, noNaN: true }),
    cPerCm: fc.double({ min: 0, max: 6000, noNaN: true }),
  })
  it('scaling Δ, B and C scales every level and keeps its name', () => {
    fc.assert(
      fc.property(field, fc.integer({ min: 1, max: 9 }), fc.double({ min: 0.1, max: 10, noNaN: true }), (f, d, s) => {
        const one = levels(d, { geometry: 'octahedral', ...f })
        const many = levels(d, {
          geometry: 'octahedral',
          deltaPerCm: s * f.deltaPerCm,
          bPerCm: s * f.bPerCm,
          cPerCm: s * f.cPerCm,
        })
        for (const { label, index, energyPerCm } of one)
          expect(Math.abs(energy(many, label, index) - s * energyPerCm)).toBeLessThan(1e-8 * s * 1e5)
      }),
      { numRuns: 60 },
    )
  })
  it('the states number C(10, n), the energies ascend from zero, indices count upwards', () => {
    fc.assert(
      fc.property(field, fc.integer({ min: 1, max: 9 }), (f, d) => {
        const list = levels(d, { geometry: 'tetrahedral', ...f })
        const states = [0, 10, 45, 120, 210, 252, 210, 120, 45, 10][d]
        expect(list.reduce((sum, { degeneracy }) => sum + degeneracy, 0)).toBe(states)
        expect(list[0]!.energyPerCm).toBe(0)
        const seen = new Map<string, number>()
        list.forEach(({ label, index, energyPerCm }, i) => {
          if (i > 0) expect(energyPerCm).toBeGreaterThanOrEqual(list[i - 1]!.energyPerCm)
          const before = seen.get(label)
          if (before !== undefined) expect(energyPerCm).toBeGreaterThanOrEqual(before)
          else expect(index).toBeGreaterThan(0)
          seen.set(label, energyPerCm)
        })
      }),
      { numRuns: 60 },
    )
  })
  it('small symmetric matrices: eigenvalues and eigenvectors agree with ml-matrix', () => {
    fc.assert(
      fc.property(
        fc
          .integer({ min: 1, max: 12 })
          .chain((n) =>
            fc.tuple(
              fc.constant(n),
              fc.array(fc.integer({ min: -10000, max: 10000 }), { minLength: n * n, maxLength: n * n }),
            ),
          ),
        ([n, entries]) => {
          const a = Float64Array.from(entries, (_, k) => entries[Math.min(k, (k % n) * n + Math.floor(k / n))]!)
          const theirs = [
            ...new EigenvalueDecomposition(Matrix.from1DArray(n, n, [...a]), { assumeSymmetric: true }).realEigenvalues,
          ].sort((x, y) => x - y)
          const values = new Float64Array(n)
          eigenvalues(a.slice(), n, values)
          expect(worst([...values], theirs)).toBeLessThan(1e-8)
          const diagonal = a.slice()
          const vectors = new Float64Array(n * n)
          eigensystem(diagonal, n, vectors)
          for (let k = 0; k < n; k += 1) {
            expect(Math.abs(diagonal[k * n + k]! - theirs[k]!)).toBeLessThan(1e-8)
            for (let i = 0; i < n; i += 1) {
              let image = 0
              for (let j = 0; j < n; j += 1) image += a[i * n + j]! * vectors[k * n + j]!
              expect(Math.abs(image - theirs[k]! * vectors[k * n + i]!)).toBeLessThan(1e-7)
            }
          }
        },
      ),
      { numRuns: 40 },
    )
  })
})

describe('fields that are none', () => {
  const good = octahedral(17400, 725, 3262)
  const refusals: readonly (readonly [string, number, Field, string])[] = [
    ['no electrons', 0, good, 'no d-d bands'],
    ['a full shell', 10, good, 'no d-d bands'],
    ['half an electron', 2.5, good, 'number of d electrons'],
    ['a negative Δ', 3, { ...good, deltaPerCm: -1 }, 'below zero'],
    ['a negative B', 3, { ...good, bPerCm: -1 }, 'below zero'],
    ['a C that is no number', 3, { ...good, cPerCm: Number.NaN }, 'no energy'],
    ['an infinite Ds', 3, { ...good, dsPerCm: Number.POSITIVE_INFINITY }, 'no energy'],
    ['two distortions', 3, { ...good, dsPerCm: 1, dTauPerCm: 1 }, 'together'],
    ['a distorted tetrahedron', 3, { ...good, geometry: 'tetrahedral', dtPerCm: 1 }, 'distortions'],
    ['spin-orbit coupling in a distorted field', 3, { ...good, dtPerCm: 1, zetaPerCm: 1 }, 'spin-orbit'],
  ]
  for (const [what, d, field, words] of refusals)
    it(`${what} is refused in words`, () => {
      expect(() => levels(d, field)).toThrow(FaultError)
      expect(() => levels(d, field)).toThrow(words)
    })
})
