import { z } from 'zod'
import { name, number, quantity, text, word } from '../pieces.ts'

const reading = z.strictObject({
  x: word(['nm', 'um', 'cm^-1', 'eV']).optional().describe('Unit of the axis'),
  medium: word(['air', 'vacuum']).optional().describe('What the wavelengths are measured in'),
  y: word([
    'absorbance',
    'transmittance',
    'percent-transmittance',
    'reflectance',
    'percent-reflectance',
    'kubelka-munk',
  ])
    .optional()
    .describe('What the second column is'),
  delimiter: word([';', ',', 'tab', 'space', '|']).optional().describe('Between columns'),
  layout: word(['columns', 'rows']).optional().describe('Whether a spectrum is a column or a row of a table'),
  decimal: word(['.', ',']).optional().describe('Decimal mark'),
})

const sample = z.strictObject({
  from: word(['filename', 'folder', 'header']),
  pattern: text().optional().describe('Regular expression with the groups (?<sample>…) and, if wanted, (?<time>…)'),
})

const wavelength = z.strictObject({
  repeatability: quantity('wavelength', 'positive').prefault('0.05 nm').describe('Standard deviation between runs'),
  accuracy: quantity('wavelength', 'positive').prefault('0.5 nm').describe('Half-width of what the maker grants'),
  bandwidth: quantity('wavelength', 'positive').prefault('1 nm').describe('Spectral bandwidth'),
})

/** `instruments/*.yaml` */
export const instrumentSchema = z.strictObject({
  instrument: name().describe('Short name, for commands and letters'),
  title: text().optional(),
  drop: text().describe('Folder that it drops its files in; relative to the configuration folder'),
  files: text()
    .prefault('**/*.{csv,txt,dx,jdx}')
    .describe('Which files there are spectra, relative to the drop folder'),
  reading: reading.prefault({}).describe('What the reader need not work out'),
  sample: sample.prefault({ from: 'filename' }).describe("Where the sample's name stands"),
  limits: z
    .strictObject({ absorbance: number({ least: 0, above: true, most: 10 }).prefault('2.0') })
    .prefault({})
    .describe('Absorbance above which a point counts as saturated'),
  wavelength: wavelength.prefault({}),
  watch: word(['auto', 'events', 'polling'])
    .prefault('auto')
    .describe('How arrivals are noticed: auto polls network shares, which send no events'),
  every: quantity('duration', 'positive').optional().describe('A gap twice as long is an overdue instrument'),
})

export type InstrumentFile = z.output<typeof instrumentSchema>
