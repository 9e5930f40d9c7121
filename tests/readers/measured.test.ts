import { readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { readSpectra } from '../../src/readers/index.ts'
import { prepareSpectrum } from '../../src/spectrum/index.ts'

const data = process.env.TENDQ_REFERENCE_DATA
const why = data === undefined ? ' (skipped: TENDQ_REFERENCE_DATA names no folder with the published files)' : ''
const OPTIONS = { medium: 'air', absorbanceLimit: 2, bandwidthNm: 1 } as const

describe.skipIf(data === undefined)(`published measurements${why}`, () => {
  const folder = (name: string) => join(data!, name)

  it('a vanadium(II)/vanadium(III) series in text: eleven files of 3648 points, with time and path', () => {
    const files = readdirSync(folder('vanadium')).filter((name) => name.endsWith('.csv'))
    expect(files).toHaveLength(11)
    for (const name of files) {
      const reading = readSpectra(readFileSync(join(folder('vanadium'), name)), name, {})
      if (reading.kind === 'refused') throw new Error(reading.faults[0].what)
      const [raw] = reading.spectra
      expect([raw!.x.length, raw!.x[0], raw!.x.at(-1), raw!.xUnit, raw!.yKind]).toEqual([
        3648,
        345.271,
        1033.967,
        'nm',
        'absorbance',
      ])
      expect(raw!.time?.offset).toBe('+01:00')
      expect(raw!.pathMm).toBe(1)
    }
  })

  it('its spikes near 346 to 348 nm are masked and flagged, and its noise spans more than thirtyfold', () => {
    for (const name of readdirSync(folder('vanadium')).filter((file) => file.endsWith('.csv'))) {
      const reading = readSpectra(readFileSync(join(folder('vanadium'), name)), name, {})
      const prepared = prepareSpectrum(reading.spectra[0]!, OPTIONS)
      if (prepared.kind === 'refused') throw new Error(prepared.faults[0].what)
      const { flags, used, noise, wavenumberPerCm } = prepared.spectrum
      expect(flags).toEqual(['spike'])
      const masked = [...used.keys()].filter((i) => used[i] === 0).map((i) => 1e7 / wavenumberPerCm[i]!)
      expect(Math.max(...masked)).toBeLessThan(349)
      expect(masked.some((nm) => nm > 346 && nm < 348.5)).toBe(true)
      expect(Math.max(...noise) / Math.min(...noise)).toBeGreaterThan(30)
    }
  })

  it('an aquation in five JCAMP-DX blocks: read, with warnings for FIRSTY and extrema that contradict the data', () => {
    const [name] = readdirSync(folder('aquation')).filter((file) => file.endsWith('.jdx'))
    const reading = readSpectra(readFileSync(join(folder('aquation'), name!)), name!, {})
    if (reading.kind === 'refused') throw new Error(reading.faults[0].what)
    expect(reading.spectra).toHaveLength(5)
    for (const raw of reading.spectra) {
      expect([raw.x.length, raw.x[0], raw.x[1], raw.x.at(-1), raw.xUnit, raw.yKind]).toEqual([
        176,
        700,
        698,
        350,
        'nm',
        'absorbance',
      ])
      const codes = raw.warnings.map(({ code }) => code)
      expect(codes).toEqual(['firsty-contradiction', 'maxy-contradiction', 'miny-contradiction'])
    }
    // the first ordinate as it stands in the file: -51473 times YFACTOR
    expect(reading.spectra[0]!.y[0]).toBeCloseTo(-51473 * 0.00000011920928955078, 12)
    expect(reading.spectra.map((raw) => raw.time?.local)).toEqual(
      ['07:10', '07:33', '08:07', '08:40', '09:14'].map((at) => `1996-11-04T18:${at}`),
    )
  })
})
