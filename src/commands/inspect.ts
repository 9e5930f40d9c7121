import { readFileSync, statSync } from 'node:fs'
import { basename } from 'node:path'
import type { Command } from 'commander'
import { EXIT, type ExitCode, type Fault, sayFault } from '../fault.ts'
import { confidences, readSpectra, settleYaml } from '../readers/index.ts'
import type { AxisUnit, Medium, OrdinateKind, RawSpectrum, Reading, ReadingHints } from '../readers/types.ts'
import { prepareSpectrum } from '../spectrum/index.ts'
import type { PrepareOptions, Spectrum } from '../spectrum/types.ts'
import { exitWith, printFaults, printJson, printLine, usageFault } from './print.ts'
import { printable } from './printable.ts'

interface InspectOptions {
  readonly json?: true
  readonly x?: string
  readonly y?: string
  readonly medium?: string
  readonly delimiter?: string
  readonly decimal?: string
  readonly layout?: string
}

const EXAMPLE = `
Example
  $ tendq inspect export.csv
  export.csv: delimited text (sure to 0.6): semicolon-separated, decimal comma, UTF-8, 2 columns
    spectrum 1: sample AQUA-1, measured 2026-03-02T09:00:00+00:00
      axis        601 points, 300 to 900 nm in air, 11108.1 to 33323.6 cm^-1 in vacuum
      ordinate    absorbance, 0.0012 to 0.5034
      noise       0.00010 (median), 0.00008 to 0.00040

  A file that could be read in two ways is refused, with the line for the instrument's file that settles it. Try it first:
  $ tendq inspect export.csv --y absorbance --decimal ,
`

const OPTIONS: PrepareOptions = { medium: 'air', absorbanceLimit: 2, bandwidthNm: 1 }

/** `tendq inspect FILE…`: how a file would be read, and what would settle it where it would not. */
export const addInspect = (program: Command): void => {
  program
    .command('inspect')
    .description('show how a file would be read')
    .argument('<file...>', 'files as an instrument exported them')
    .option('--json', 'one JSON object a spectrum')
    .option('--x <unit>', 'unit of the axis: nm, um, cm^-1, eV')
    .option('--medium <medium>', 'air or vacuum')
    .option(
      '--y <kind>',
      'absorbance, transmittance, percent-transmittance, reflectance, percent-reflectance, kubelka-munk',
    )
    .option('--delimiter <delimiter>', 'what stands between columns')
    .option('--decimal <mark>', '. or ,')
    .option('--layout <layout>', 'columns where a spectrum is a column, rows where it is a row')
    .addHelpText('after', EXAMPLE)
    .action((files: string[], options: InspectOptions) => {
      const hints = hintsOf(options)
      const codes = files.map((path) => inspectFile(path, hints, options.json === true))
      exitWith(codes.find((code) => code === EXIT.noInput) ?? codes.find((code) => code !== EXIT.ok) ?? EXIT.ok)
    })
}

const UNITS: readonly AxisUnit[] = ['nm', 'um', 'cm^-1', 'eV']
const MEDIA: readonly Medium[] = ['air', 'vacuum']
const MARKS = ['.', ','] as const
const LAYOUTS = ['columns', 'rows'] as const
const KINDS: readonly OrdinateKind[] = [
  'absorbance',
  'transmittance',
  'percent-transmittance',
  'reflectance',
  'percent-reflectance',
  'kubelka-munk',
]

const oneOf = <T extends string>(option: string, value: string | undefined, allowed: readonly T[]): T | undefined => {
  if (value === undefined) return undefined
  const found = allowed.find((word) => word === value)
  if (found === undefined) throw usageFault(option, `"${value}" is not known`, `give one of ${allowed.join(', ')}`)
  return found
}

const hintsOf = (options: InspectOptions): ReadingHints => {
  const x = oneOf('--x', options.x, UNITS)
  const medium = oneOf('--medium', options.medium, MEDIA)
  const y = oneOf('--y', options.y, KINDS)
  const decimal = oneOf('--decimal', options.decimal, MARKS)
  const layout = oneOf('--layout', options.layout, LAYOUTS)
  return {
    ...(layout === undefined ? {} : { layout }),
    ...(x === undefined ? {} : { x }),
    ...(medium === undefined ? {} : { medium }),
    ...(y === undefined ? {} : { y }),
    ...(options.delimiter === undefined ? {} : { delimiter: options.delimiter }),
    ...(decimal === undefined ? {} : { decimal }),
  }
}

const inspectFile = (path: string, hints: ReadingHints, json: boolean): ExitCode => {
  let bytes: Uint8Array
  try {
    if (!statSync(path).isFile()) throw new Error('it is no file')
    bytes = readFileSync(path)
  } catch (error) {
    const why = error instanceof Error ? error.message.replace(/^[A-Z]+: /, '').split(',')[0]! : String(error)
    printFaults([
      { code: 'no-input', place: { at: path }, what: `cannot be opened (${why})`, remedy: 'check the name' },
    ])
    return EXIT.noInput
  }
  const reading = readSpectra(bytes, path, hints)
  const claims = confidences(bytes).map(({ reader, confidence }) => ({ format: reader.format, confidence }))
  const sure = claims[0]?.confidence ?? 0
  const refusals: Fault[] = reading.kind === 'refused' ? [...reading.faults] : []
  if (!json) {
    printLine(heading(path, reading, sure))
    for (const line of otherClaims(claims)) printLine(`  ${line}`)
  }
  for (const raw of reading.spectra) {
    const prepared = prepareSpectrum(raw, { ...OPTIONS, medium: hints.medium ?? OPTIONS.medium })
    const spectrum = prepared.kind === 'prepared' ? prepared.spectrum : null
    if (prepared.kind === 'refused')
      refusals.push(...prepared.faults.map((fault) => ({ ...fault, place: { at: path } })))
    if (json) printJson({ ...asJson(path, reading, sure, raw, spectrum), readers: claims })
    else for (const line of describe(raw, spectrum)) printLine(`  ${line}`)
  }
  if (reading.kind === 'refused') {
    if (json && reading.spectra.length === 0)
      printJson({
        file: path,
        format: reading.format,
        confidence: sure,
        faults: reading.faults,
        settle: reading.settle,
        readers: claims,
      })
    if (!json && reading.settle.length > 0) {
      printLine(
        `  to settle it, paste ${reading.settle.length > 1 ? 'the one that is true' : 'this'} into the instrument's file:`,
      )
      for (const yaml of reading.settle) printLine(`    ${yaml}`)
    }
  } else if (!json) for (const warning of reading.warnings) printLine(`  warning: ${sayFault(warning)}`)
  printFaults(refusals)
  return refusals.length > 0 ? EXIT.unreadable : EXIT.ok
}

/** Other readers that think the file may be theirs. */
const otherClaims = (claims: readonly { readonly format: string; readonly confidence: number }[]): readonly string[] =>
  claims
    .slice(1)
    .filter(({ confidence }) => confidence > 0)
    .map(({ format, confidence }) => `might also be ${format} (sure to ${confidence})`)

const heading = (path: string, reading: Reading, sure: number): string =>
  reading.kind === 'read'
    ? `${basename(path)}: ${reading.format} (sure to ${sure}): ${reading.dialect}`
    : `${basename(path)}: refused${reading.format === null ? '' : ` as ${reading.format} (sure to ${sure})`}`

const extremes = (values: Float64Array): readonly [number, number] => {
  const seen = values.filter((v) => Number.isFinite(v)).sort()
  return [seen[0] ?? Number.NaN, seen.at(-1) ?? Number.NaN]
}

const short = (value: number): string => String(Number(value.toPrecision(6)))

const describe = (raw: RawSpectrum, spectrum: Spectrum | null): readonly string[] => {
  const [low, high] = extremes(raw.y)
  const time =
    raw.time === null ? 'no time in the file' : `measured ${raw.time.local}${raw.time.offset ?? ' (no zone written)'}`
  const facts = [
    raw.pathMm === null ? null : `path ${raw.pathMm} mm`,
    raw.temperatureC === null ? null : `${raw.temperatureC} degC`,
    raw.concentrationMolPerL === null ? null : `${raw.concentrationMolPerL} mol/L`,
  ].filter((fact) => fact !== null)
  const head = `spectrum ${raw.index + 1}: ${raw.sample === null ? 'no sample named in the file' : `sample ${printable(raw.sample)}`}, ${time}`
  const lines = [
    head,
    ...(raw.title === null ? [] : [`  title       ${printable(raw.title)}`]),
    `  axis        ${raw.x.length} points, ${raw.x[0]} to ${raw.x.at(-1)} ${raw.xUnit}${spectrum === null ? '' : inVacuum(raw, spectrum)}`,
    `  ordinate    ${raw.yKind}, ${short(low)} to ${short(high)}`,
    ...(facts.length > 0 ? [`  conditions  ${facts.join(', ')}`] : []),
  ]
  if (spectrum !== null) {
    const [least, most] = extremes(spectrum.noise)
    lines.push(
      `  noise       ${medianOf(spectrum.noise).toPrecision(2)} (median), ${least.toPrecision(2)} to ${most.toPrecision(2)}`,
    )
    if (spectrum.flags.length > 0)
      lines.push(
        `  flags       ${spectrum.flags.join(', ')}`,
        ...spectrum.remarks.map((remark) => `              ${remark}`),
      )
  }
  lines.push(...raw.warnings.map((warning) => `  warning     ${sayFault(warning)}`))
  return [...lines, `  as read     ${settleYaml({ x: raw.xUnit, y: raw.yKind })}`]
}

const inVacuum = (raw: RawSpectrum, { wavenumberPerCm, medium }: Spectrum): string => {
  const where = raw.xUnit === 'nm' || raw.xUnit === 'um' ? ` in ${medium}` : ''
  return `${where}, ${wavenumberPerCm[0]!.toFixed(1)} to ${wavenumberPerCm.at(-1)!.toFixed(1)} cm^-1 in vacuum`
}

const medianOf = (values: Float64Array): number => Float64Array.from(values).sort()[values.length >> 1]!

const asJson = (
  path: string,
  reading: Reading,
  confidence: number,
  raw: RawSpectrum,
  spectrum: Spectrum | null,
): object => ({
  file: path,
  index: raw.index,
  format: reading.format,
  confidence,
  dialect: reading.kind === 'read' ? reading.dialect : null,
  sample: raw.sample,
  title: raw.title,
  measured_at: raw.time === null || raw.time.offset === null ? null : `${raw.time.local}${raw.time.offset}`,
  measured_local: raw.time?.local ?? null,
  points: raw.x.length,
  x: raw.xUnit,
  x_range: [raw.x[0], raw.x.at(-1)],
  medium: spectrum?.medium ?? raw.medium,
  y: raw.yKind,
  y_range: extremes(raw.y),
  window_cm1: spectrum === null ? null : [spectrum.wavenumberPerCm[0], spectrum.wavenumberPerCm.at(-1)],
  noise: spectrum === null ? null : medianOf(spectrum.noise),
  path: raw.pathMm,
  temperature: raw.temperatureC,
  concentration: raw.concentrationMolPerL,
  flags: spectrum?.flags ?? [],
  remarks: spectrum?.remarks ?? [],
  warnings: [...(reading.spectra.length > 0 && reading.kind === 'read' ? reading.warnings : []), ...raw.warnings],
  faults: reading.kind === 'refused' ? reading.faults : [],
  settle: reading.kind === 'refused' ? reading.settle : [],
})
