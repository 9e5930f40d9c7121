import { statSync, writeFileSync } from 'node:fs'
import { basename } from 'node:path'
import { type Command, Option } from 'commander'
import { analyse, analysisJson, identify, identifyAlone } from '../analysis/index.ts'
import type { Analysis, AnalysisContext } from '../analysis/types.ts'
import { findIon } from '../chemistry/ions.ts'
import type { Instrument, Species } from '../config/types.ts'
import { roomOf } from '../daemon/room.ts'
import { EXIT, type Fault, FaultError } from '../fault.ts'
import type { Geometry, Ion, Spin } from '../ligandField/types.ts'
import { spectrumPicture } from '../pictures/spectrum.ts'
import type { RawSpectrum } from '../readers/types.ts'
import { fitText } from './fitText.ts'
import { exitWith, printJson, printLine, usageFault } from './print.ts'
import { exitOf, isoTime, spectraOf } from './spectrumFiles.ts'

interface Options {
  readonly ion?: string
  readonly geometry?: Geometry
  readonly spin?: Spin
  readonly bands?: string
  readonly species?: string
  readonly instrument?: string
  readonly config?: string
  readonly plot?: string
  readonly json?: true
}

/** What the options come to: everything that a spectrum's analysis needs to know. */
interface Setting {
  readonly context: AnalysisContext
  readonly instrument: Instrument | null
  readonly timeZone: string
}

export const addFit = (program: Command): void => {
  program
    .command('fit')
    .summary('fit bands and derive the parameters, no database')
    .description('Fits the d-d bands of spectra and derives the ligand-field parameters. Nothing is stored.')
    .argument('<file...>', 'exported spectra')
    .option('--ion <ion>', 'the metal ion, such as Cr3+')
    .addOption(
      new Option('--geometry <geometry>', 'octahedral unless said otherwise').choices(['octahedral', 'tetrahedral']),
    )
    .addOption(new Option('--spin <spin>', 'where the ion has both').choices(['high', 'low']))
    .option('--bands <n>', 'fit exactly this many d-d bands')
    .option('--species <name>', 'ion, geometry and expected bands of a species of the configuration')
    .option('--instrument <name>', 'limits and wavelength repeatability of an instrument of the configuration')
    .option('--config <folder>', 'configuration folder')
    .option('--plot <svg>', 'draw data, fit, components and residuals (one spectrum)')
    .option('--json', 'one JSON object per spectrum')
    .addHelpText(
      'after',
      `
Example:
  tendq fit aqua.csv --ion Cr3+ --json
  tendq fit batch-7.csv --species chloropentaammine --instrument uv1 --config config --plot batch-7.svg`,
    )
    .action((files: string[], options: Options) => fitFiles(files, options))
}

const fitFiles = (files: readonly string[], options: Options): void => {
  const setting = settingOf(options)
  const faults: Fault[] = []
  const fits = files.flatMap((file) => fitFile(file, setting, faults))
  for (const { name, raw, analysis } of fits) {
    const { sample, measuredAt, extraFlags } = whose(name, raw, setting)
    const { flags, ...rest } = analysisJson(analysis)
    const row = {
      file: name,
      index: raw.index,
      sample,
      measured_at: isoTime(measuredAt),
      ...rest,
      flags: [...new Set([...flags, ...extraFlags])],
    }
    if (options.json) printJson(row)
    else printLine(fitText(row))
  }
  if (options.plot !== undefined) plot(options.plot, fits)
  if (faults.length > 0) throw new FaultError(faults, exitOf(faults))
  if (fits.length === 0) exitWith(EXIT.unreadable)
}

const fitFile = (file: string, { context, instrument }: Setting, faults: Fault[]) => {
  return spectraOf(file, instrument?.reading ?? {}, faults).flatMap((raw) => {
    const outcome = analyse(raw, context, null)
    if (outcome.kind === 'analysed') return [{ name: file, raw, analysis: outcome.analysis }]
    faults.push(...outcome.faults)
    return []
  })
}

const whose = (file: string, raw: RawSpectrum, { instrument, timeZone }: Setting) => {
  const facts = { path: basename(file), mtimeMs: statSync(file).mtimeMs, timeZone }
  const identity = instrument === null ? identifyAlone(raw, facts) : identify(raw, facts, instrument)
  return { sample: identity.sample, measuredAt: identity.measuredAt, extraFlags: identity.flags }
}

const settingOf = (options: Options): Setting => {
  const config =
    options.species !== undefined || options.instrument !== undefined ? roomOf(options.config).config : null
  const species = named('--species', options.species, config?.species)
  const instrument = named('--instrument', options.instrument, config?.instruments)
  return {
    context: {
      prepare: {
        medium: instrument?.reading.medium ?? 'air',
        absorbanceLimit: instrument?.absorbanceLimit ?? 3,
        bandwidthNm: instrument?.wavelength.bandwidthNm ?? 1,
        ...(instrument?.reading.y === undefined ? {} : { y: instrument.reading.y }),
      },
      ion: ionOf(options.ion, species),
      geometry: options.geometry ?? species?.geometry ?? 'octahedral',
      spin: options.spin ?? species?.spin ?? null,
      expected: species?.bands ?? [],
      bands: bandCount(options.bands),
      repeatabilityNm: instrument?.wavelength.repeatabilityNm ?? null,
    },
    instrument,
    timeZone: config?.timeZone ?? Intl.DateTimeFormat().resolvedOptions().timeZone,
  }
}

const named = <T extends Species | Instrument>(
  option: string,
  name: string | undefined,
  among: readonly T[] | undefined,
): T | null => {
  if (name === undefined) return null
  const found = among?.find((one) => one.name === name)
  if (found === undefined)
    throw usageFault(
      option,
      `no ${option.slice(2)} ${name} in the configuration`,
      `there are: ${among?.map((one) => one.name).join(', ')}`,
    )
  return found
}

const ionOf = (symbol: string | undefined, species: Species | null): Ion => {
  const asked = symbol ?? species?.ion
  if (asked === undefined)
    throw usageFault('--ion', 'which metal ion is it', 'say for example --ion Cr3+, or name a --species')
  const found = findIon(asked)
  if (found.kind === 'found') return found.ion
  throw usageFault(
    '--ion',
    `no ion ${asked} in the table`,
    found.nearest === null ? 'write it as Cr3+' : `did you mean ${found.nearest}?`,
  )
}

const bandCount = (text: string | undefined): number | null => {
  if (text === undefined) return null
  const count = Number(text)
  if (!Number.isInteger(count) || count < 1 || count > 8)
    throw usageFault('--bands', `${text} is no number of bands`, 'give a whole number from 1 to 8')
  return count
}

const plot = (out: string, fits: readonly { readonly name: string; readonly analysis: Analysis }[]): void => {
  const [only, ...more] = fits
  if (only === undefined) return
  if (more.length > 0)
    throw usageFault('--plot', `${fits.length} spectra do not fit in one drawing`, 'plot one spectrum at a time')
  const { spectrum, fit, bands } = only.analysis
  if (spectrum === null) return
  writeFileSync(
    out,
    spectrumPicture({ spectrum, fit, title: basename(only.name), roles: bands.map(({ role }) => role) }),
  )
}
