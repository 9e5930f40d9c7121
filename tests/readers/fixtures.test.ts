import { readdirSync, readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { readSpectra } from '../../src/readers/index.ts'
import type { RawSpectrum, WrittenTime } from '../../src/readers/types.ts'

/** Every good file holds this curve, at 400, 405 … 500 nm, rounded to four decimals. */
const NM = Array.from({ length: 21 }, (_, i) => 400 + 5 * i)
const curve = (nm: number): number => Math.round((0.05 + 0.4 * Math.exp(-(((nm - 450) / 25) ** 2))) * 1e4) / 1e4

interface Expected {
  readonly unit?: RawSpectrum['xUnit']
  readonly kind?: RawSpectrum['yKind']
  readonly x?: readonly number[]
  readonly y?: (nm: number, i: number) => number
  /** Half a step in the last written decimal of the ordinate. */
  readonly within?: number
  readonly sample?: string | null
  readonly time?: WrittenTime | null
  readonly pathMm?: number | null
  readonly temperatureC?: number | null
  readonly concentrationMolPerL?: number | null
  readonly warnings?: readonly string[]
}

const percent = (nm: number) => 100 * 10 ** -curve(nm)
const fraction = (nm: number) => 10 ** -curve(nm)
const at = (local: string, offset: string | null = null): WrittenTime => ({ local, offset })
const evKilo = 1239.841984 // hc in eV nm, CODATA

const GOOD: Readonly<Record<string, Expected | readonly Expected[]>> = {
  'plain-comma.csv': {},
  'german-semicolon.csv': { sample: 'CR-7', time: at('2026-03-02T09:15:30'), pathMm: 10, temperatureC: 25 },
  'french-utf16.txt': { sample: 'CR-8', time: at('2026-03-03T14:05:00'), pathMm: 10 },
  'spanish-bom.csv': { sample: 'CR-9', time: at('2026-03-04T08:00:00') },
  'declared-delimiter.csv': {},
  'blanks.txt': {},
  'tabs-descending.txt': { x: [...NM].reverse() },
  'bars.txt': {},
  'percent-transmittance.csv': { kind: 'percent-transmittance', y: percent },
  'transmittance.csv': { kind: 'transmittance', y: fraction, within: 5e-7 },
  'percent-by-value.csv': { kind: 'percent-transmittance', y: percent },
  'reflectance-percent.csv': { kind: 'percent-reflectance', y: percent },
  'remission-german.csv': { kind: 'reflectance', y: fraction, within: 5e-7 },
  'kubelka-munk.csv': { kind: 'kubelka-munk' },
  'wavenumber.csv': { unit: 'cm^-1', x: NM.map((nm) => 1e7 / nm) },
  'wellenzahl.csv': { unit: 'cm^-1', x: NM.map((nm) => 1e7 / nm) },
  'micrometre.csv': { unit: 'um', x: NM.map((nm) => nm / 1000) },
  'electronvolt.csv': { unit: 'eV', x: NM.map((nm) => evKilo / nm) },
  'exponents.csv': {},
  'fortran-d.txt': {},
  'unicode-minus.csv': { y: (nm) => curve(nm) - 0.3 },
  'quoted.csv': {},
  'quoted-decimal-comma.csv': {},
  'index-column.csv': {},
  'many-ordinates.csv': [1, 2, 4].map((by, k) => ({ y: (nm) => curve(nm) / by, sample: `S-${k + 1}` })),
  'paired-columns.csv': [{ sample: 'P-1' }, { sample: 'P-2', x: NM.slice(0, 16).map((nm) => nm + 1) }],
  'two-heading-rows.csv': {},
  'footer.csv': { temperatureC: 25, concentrationMolPerL: 0.012 },
  'overflow-words.csv': { y: (nm) => (nm >= 440 && nm <= 460 ? Infinity : curve(nm)) },
  'missing-words.csv': { y: (nm) => (nm === 450 || nm === 455 ? Number.NaN : curve(nm)) },
  'mixed-line-ends.csv': {},
  'trailing-delimiters.csv': {},
  'thousands.csv': { x: NM.map((nm) => nm + 600) },
  'ambiguous-date.csv': { sample: 'X-1', time: null, warnings: ['time-unclear'] },
  'iso-zone.csv': { sample: 'Z-1', time: at('2026-03-02T09:00:00', '+01:00'), pathMm: 2 },
  'both-axes.csv': {},
  'no-last-line-end.csv': {},
  'utf16be.csv': {},
  'matrix-samples.csv': [1, 2, 4].map((by, k) => ({
    y: (nm: number) => curve(nm) / by,
    sample: `M-${k + 1}`,
    warnings: ['axis-by-value'],
  })),
  'matrix-times.csv': [
    [1, '2026-03-02T09:00:00'] as const,
    [2, '2026-03-02T09:10:00'] as const,
    [4, '2026-03-02T10:30:00'] as const,
  ].map(([by, time]) => ({ y: (nm: number) => curve(nm) / by, time: at(time) })),
  'matrix-clock.txt': [[1, '2026-03-02T09:30:00'] as const, [2, '2026-03-02T10:30:00'] as const].map(([by, time]) => ({
    y: (nm: number) => curve(nm) / by,
    time: at(time),
    warnings: ['axis-by-value'],
  })),
  'matrix-one-row.csv': {},
  'matrix-percent-wavenumber.csv': [1, 2].map((by, k) => ({
    unit: 'cm^-1' as const,
    x: NM.map((nm) => 1e7 / nm),
    kind: 'percent-transmittance' as const,
    y: (nm: number) => 100 * 10 ** (-curve(nm) / by),
    sample: `W-${k + 1}`,
  })),
  'jcamp-affn.dx': {},
  'jcamp-pac.dx': {},
  'jcamp-sqz.dx': {},
  'jcamp-dif.dx': {},
  'jcamp-difdup.dx': {},
  'jcamp-points.jdx': {},
  'jcamp-points-line.jdx': {},
  'jcamp-descending.jdx': { x: [...NM].reverse() },
  'jcamp-comments-crlf.jdx': {
    sample: 'J-1',
    time: at('2026-03-02T09:00:00', '+01:00'),
    pathMm: 10,
    temperatureC: 25,
    concentrationMolPerL: 0.012,
  },
  'jcamp-missing.jdx': { y: (nm) => (nm === 415 ? Number.NaN : curve(nm)) },
  'jcamp-link.jdx': [{}, {}],
  'jcamp-ntuples-times.jdx': [
    [1, '2026-03-02T09:00:00'] as const,
    [2, '2026-03-02T09:10:00'] as const,
    [4, '2026-03-02T10:30:00'] as const,
  ].map(([by, time]) => ({ y: (nm: number) => curve(nm) / by, time: at(time, '+01:00') })),
  'jcamp-ntuples-dif.jdx': [
    [1, '2026-03-02T09:00:00'] as const,
    [2, '2026-03-02T19:00:00'] as const,
    [4, '2026-03-06T03:00:00'] as const,
  ].map(([by, time]) => ({ y: (nm: number) => curve(nm) / by, time: at(time, '+01:00') })),
  'jcamp-ntuples-temperature-pairs.jdx': [{ temperatureC: 25 }, { y: (nm) => curve(nm) / 2, temperatureC: 40 }],
  'jcamp-wrong-firsty.jdx': { warnings: ['firsty-contradiction'] },
  'jcamp-scaled-firsty.jdx': {},
}

const folder = (name: string) => new URL(`../../fixtures/readers/${name}/`, import.meta.url)
const read = (kind: string, name: string) => readSpectra(readFileSync(new URL(name, folder(kind))), name, {})

describe('files as instruments write them', () => {
  it('every file is expected, and every expectation has its file', () => {
    expect(readdirSync(folder('good')).sort()).toEqual(Object.keys(GOOD).sort())
  })

  it.each(Object.entries(GOOD))('%s reads back as the curve it was written from', (name, wanted) => {
    const reading = read('good', name)
    if (reading.kind === 'refused') throw new Error(reading.faults[0].what)
    const list = Array.isArray(wanted) ? (wanted as readonly Expected[]) : [wanted as Expected]
    expect(reading.spectra).toHaveLength(list.length)
    for (const [k, expected] of list.entries()) {
      const spectrum = reading.spectra[k]!
      const nominal = expected.x ?? NM
      expect(spectrum.index).toBe(k)
      expect([spectrum.xUnit, spectrum.yKind]).toEqual([expected.unit ?? 'nm', expected.kind ?? 'absorbance'])
      expect(spectrum.x).toHaveLength(nominal.length)
      // wavenumbers are written to 1e-4 cm-1, energies to 1e-6 eV
      for (const [i, x] of nominal.entries()) expect(Math.abs(spectrum.x[i]! - x)).toBeLessThan(x > 2000 ? 6e-5 : 6e-7)
      const descending = name.includes('descending')
      for (const i of spectrum.x.keys()) {
        const nm = NM[descending ? NM.length - 1 - i : i]!
        const y = (expected.y ?? curve)(nm, i)
        if (Number.isFinite(y)) expect(Math.abs(spectrum.y[i]! - y)).toBeLessThan((expected.within ?? 5e-5) + 1e-9)
        else expect(spectrum.y[i]).toBe(y)
      }
      for (const fact of ['sample', 'time', 'pathMm', 'temperatureC', 'concentrationMolPerL'] as const) {
        expect(spectrum[fact], fact).toEqual(expected[fact] ?? null)
      }
      expect([...reading.warnings, ...spectrum.warnings].map(({ code }) => code)).toEqual(expected.warnings ?? [])
    }
  })
})

/** Code of the first fault, and its line where it has one. */
const BROKEN: Readonly<Record<string, readonly [code: string, line?: number]>> = {
  'letter-in-axis.csv': ['not-a-number', 12],
  'letter-in-ordinate.csv': ['not-a-number', 12],
  'axis-turns-back.csv': ['axis-order', 12],
  'last-abscissa.csv': ['axis-jump', 22],
  'first-abscissa.csv': ['axis-unit', 2],
  'short-row.csv': ['row-length', 12],
  'long-row.csv': ['row-length', 12],
  'no-kind.csv': ['ordinate-unknown', 2],
  'no-heading.csv': ['ordinate-unknown', 1],
  'nm-or-wavenumber.csv': ['axis-unit', 2],
  'wavenumbers-called-nm.csv': ['axis-unit', 2],
  'nm-called-wavenumbers.csv': ['axis-unit', 2],
  'absorbance-of-90.csv': ['ordinate-scale', 2],
  'percent-or-fraction.csv': ['ordinate-scale', 2],
  'comma-twice.csv': ['ambiguous-comma', 2],
  'comma-integers.csv': ['ambiguous-comma', 1],
  'two-tables.csv': ['second-table', 25],
  'two-scans.csv': ['axis-order', 23],
  'derivative.csv': ['ordinate-unknown', 2],
  'counts.csv': ['ordinate-unknown', 2],
  'angstrom.csv': ['axis-unit', 2],
  'time-axis.csv': ['axis-unknown', 2],
  'note-and-time-axis.csv': ['axis-unknown', 3],
  'abs-and-percent.csv': ['which-ordinate', 2],
  'jcamp-ntuples-page-missing.jdx': ['page-count', 13],
  'jcamp-ntuples-cut.jdx': ['cut-short', 8],
  'jcamp-ntuples-line-x.jdx': ['axis-contradiction', 26],
  'jcamp-ntuples-check.jdx': ['check-ordinate', 33],
  'jcamp-ntuples-short.jdx': ['point-count', 27],
  'jcamp-ntuples-symbol.jdx': ['unknown-table', 19],
  'jcamp-ntuples-empty-page.jdx': ['no-ordinates', 28],
  'jcamp-ntuples-list-long.jdx': ['list-length', 15],
  'matrix.csv': ['ordinate-unknown', 1],
  'matrix-short-row.csv': ['row-length', 4],
  'matrix-damaged-heading.csv': ['not-a-number', 2],
  'matrix-letter.csv': ['not-a-number', 4],
  'matrix-axis-turns-back.csv': ['axis-order', 2],
  'matrix-axis-letter.csv': ['not-a-number', 2],
  'matrix-stops.csv': ['row-length', 4],
  'empty.csv': ['empty'],
  'prose.txt': ['unknown-format'],
  'binary.bin': ['unknown-format'],
  'cut-in-a-number.csv': ['cut-short', 22],
  'cut-in-a-row.csv': ['cut-short', 22],
  'hex.csv': ['not-a-number', 12],
  'two-points.csv': ['too-few-points', 2],
  'axis-hole.csv': ['not-a-number', 12],
  'open-quote.csv': ['open-quote', 12],
  'jcamp-npoints-more.jdx': ['axis-contradiction', 16],
  'jcamp-npoints-fewer.jdx': ['axis-contradiction', 16],
  'jcamp-lastx.jdx': ['axis-contradiction', 16],
  'jcamp-firstx.jdx': ['axis-contradiction', 15],
  'jcamp-deltax.jdx': ['axis-contradiction', 14],
  'jcamp-line-x.jdx': ['axis-contradiction', 16],
  'jcamp-check-ordinate.jdx': ['check-ordinate', 16],
  'jcamp-no-end.jdx': ['cut-short', 17],
  'jcamp-cut.jdx': ['cut-short'],
  'jcamp-two-dups.jdx': ['bad-ordinate', 15],
  'jcamp-leading-dif.jdx': ['bad-ordinate', 15],
  'jcamp-no-npoints.jdx': ['label-missing'],
  'jcamp-no-firstx.jdx': ['label-missing'],
  'jcamp-bad-factor.jdx': ['not-a-number', 8],
  'jcamp-arbitrary.jdx': ['ordinate-unknown', 7],
  'jcamp-seconds.jdx': ['axis-unit', 6],
  'jcamp-wrong-unit.jdx': ['axis-unit', 15],
  'jcamp-letter.jdx': ['bad-ordinate', 15],
  'jcamp-odd-pair.jdx': ['bad-pair', 15],
  'jcamp-pairs-lastx.jdx': ['axis-contradiction', 11],
  'jcamp-link-short.jdx': ['block-count', 1],
  'jcamp-peaks.jdx': ['unknown-table', 14],
  'jcamp-label-twice.jdx': ['label-twice', 14],
}

describe('broken files', () => {
  it('every file is expected, and every expectation has its file', () => {
    expect(readdirSync(folder('broken')).sort()).toEqual(Object.keys(BROKEN).sort())
  })

  it.each(Object.entries(BROKEN))('%s is refused at its place, with a remedy', (name, [code, line]) => {
    const reading = read('broken', name)
    if (reading.kind === 'read') throw new Error('it was read')
    const fault = reading.faults[0]
    expect(fault.code).toBe(code)
    if (line !== undefined) expect(fault.place.line).toBe(line)
    expect(fault.place.at).toBe(name)
    expect(fault.remedy).not.toBe('')
  })

  it.each(['no-heading.csv', 'nm-or-wavenumber.csv', 'abs-and-percent.csv', 'percent-or-fraction.csv'])(
    '%s is read once the YAML it asks for says which',
    (name) => {
      const reading = read('broken', name)
      if (reading.kind === 'read') throw new Error('it was read')
      expect(reading.settle.length).toBeGreaterThanOrEqual(2)
      for (const yaml of reading.settle) {
        const words = Object.fromEntries(
          [...yaml.matchAll(/(x|y|delimiter|decimal): ("?)([^\s"]+?)\2(?=,? )/g)].map((m) => [m[1], m[3]]),
        )
        const settled = readSpectra(readFileSync(new URL(name, folder('broken'))), name, words)
        expect(settled.kind, `${yaml} ${JSON.stringify(words)}`).toBe('read')
      }
    },
  )
})
