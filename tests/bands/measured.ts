/** Measured spectra of the folder TENDQ_REFERENCE_DATA, read and analysed as `fit` does. */
import { existsSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { analyse } from '../../src/analysis/index.ts'
import type { Analysis } from '../../src/analysis/types.ts'
import type { BandFit, FittedComponent } from '../../src/bands/types.ts'
import { findIon } from '../../src/chemistry/ions.ts'
import { readSpectra } from '../../src/readers/index.ts'
import type { RawSpectrum } from '../../src/readers/types.ts'
import { prepareSpectrum } from '../../src/spectrum/index.ts'
import type { PrepareOptions, Spectrum } from '../../src/spectrum/types.ts'

export const referenceFolder = process.env.TENDQ_REFERENCE_DATA
export const hasReferenceData = referenceFolder !== undefined && existsSync(referenceFolder)
const PREPARE: PrepareOptions = { medium: 'air', absorbanceLimit: 3, bandwidthNm: 1 }

export const CHARGES = ['000', '010', '020', '030', '040', '050', '060', '070', '080', '090', '100'] as const

const read = (...path: readonly string[]): readonly RawSpectrum[] => {
  const file = join(referenceFolder!, ...path)
  const reading = readSpectra(readFileSync(file), file, {})
  if (reading.kind === 'refused') throw new Error(reading.faults[0]?.what ?? 'refused')
  return reading.spectra
}

export const readVanadium = (percent: string): RawSpectrum => read('vanadium', `v2v3_${percent}pc.csv`)[0]!

/** Five spectra, ten minutes apart in all. */
export const readAquation = (): readonly RawSpectrum[] => read('aquation', 'trans_dichlorobis_en_cobalt.jdx')

export const prepared = (raw: RawSpectrum): Spectrum => {
  const preparation = prepareSpectrum(raw, PREPARE)
  if (preparation.kind === 'refused') throw new Error(preparation.faults[0].what)
  return preparation.spectrum
}

/** On its own, without a locked recipe. */
export const analysed = (raw: RawSpectrum, symbol: string): Analysis => {
  const found = findIon(symbol)
  if (found.kind !== 'found') throw new Error(symbol)
  const outcome = analyse(
    raw,
    {
      prepare: PREPARE,
      ion: found.ion,
      geometry: 'octahedral',
      spin: null,
      expected: [],
      bands: null,
      repeatabilityNm: null,
    },
    null,
  )
  if (outcome.kind === 'refused') throw new Error(outcome.faults[0].what)
  return outcome.analysis
}

export const bandsOf = (fit: BandFit): readonly FittedComponent[] => {
  if (fit.kind === 'unfitted') throw new Error(fit.why)
  return fit.components.filter(({ kind }) => kind === 'band')
}
