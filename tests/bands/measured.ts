/** Measured spectra of the folder TENDQ_REFERENCE_DATA, read with no more than these tests need. */
import { existsSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { prepareSpectrum } from '../../src/spectrum/index.ts'
import type { Spectrum } from '../../src/spectrum/types.ts'

export const referenceFolder = process.env.TENDQ_REFERENCE_DATA
export const hasReferenceData = referenceFolder !== undefined && existsSync(referenceFolder)

export const spectrumOf = (rows: readonly (readonly [nm: number, absorbance: number])[]): Spectrum => {
  const prepared = prepareSpectrum(
    {
      index: 0,
      x: Float64Array.from(rows, (row) => row[0]),
      y: Float64Array.from(rows, (row) => row[1]),
      xUnit: 'nm',
      medium: 'air',
      yKind: 'absorbance',
      sample: null,
      title: null,
      time: null,
      pathMm: null,
      temperatureC: null,
      concentrationMolPerL: null,
      header: {},
      warnings: [],
    },
    { medium: 'air', absorbanceLimit: 2, bandwidthNm: 1 },
  )
  if (prepared.kind !== 'prepared') throw new Error('the measured spectrum was refused')
  return prepared.spectrum
}

export const readVanadium = (percent: string): Spectrum => {
  const text = readFileSync(join(referenceFolder!, 'vanadium', `v2v3_${percent}pc.csv`), 'utf8')
  return spectrumOf(
    text
      .split('\n')
      .filter((line) => /^\d/.test(line))
      .map((line) => line.split(',').map(Number) as [number, number]),
  )
}

/** The five blocks of the aquation file: AFFN with the first x of every line. */
export const readAquation = (): readonly Spectrum[] => {
  const text = readFileSync(join(referenceFolder!, 'aquation', 'trans_dichlorobis_en_cobalt.jdx'), 'utf8')
  return text
    .split('##XYDATA= (X++(Y..Y))')
    .slice(1)
    .map((block) => {
      const factor = 0.00000011920928955078
      const rows = block
        .split('##END')[0]!
        .trim()
        .split('\n')
        .flatMap((line) => {
          const [x, ...ys] = line.trim().split(/\s+/).map(Number)
          return ys.map((y, i) => [x! - 2 * i, y * factor] as const)
        })
      return spectrumOf(rows)
    })
}
