import type { Command } from 'commander'
import { mixtureOf, type Share } from '../analysis/index.ts'
import { EXIT, type Fault, FaultError } from '../fault.ts'
import { prepareSpectrum } from '../spectrum/index.ts'
import type { PrepareOptions, Spectrum } from '../spectrum/types.ts'
import { printJson, printLine } from './print.ts'
import { printable } from './printable.ts'
import { exitOf, spectraOf } from './spectrumFiles.ts'

const OPTIONS: PrepareOptions = { medium: 'air', absorbanceLimit: 3, bandwidthNm: 1 }

const EXAMPLE = `
Example
  $ tendq mixture charge-000.csv charge-050.csv charge-100.csv
  file            first              last               sum      rms
  charge-000.csv  1.0000 +- 0.0117   0.0000 +- 0.0000   1.0000   0.01577
  charge-050.csv  0.5478 +- 0.0088   0.4660 +- 0.0105   1.0138   0.00696
  charge-100.csv  0.0000 +- 0.0000   1.0000 +- 0.0182   1.0000   0.00730
  the two shares add up to one within their uncertainty (100.0 % to 101.4 %)
`

interface Row {
  readonly file: string
  readonly index: number
  readonly spectrum: Spectrum
}

/** `tendq mixture FILE…`: how much of the first and of the last spectrum each one holds. */
export const addMixture = (program: Command): void => {
  program
    .command('mixture')
    .summary('how much of the first and of the last spectrum each one holds')
    .description(
      'Fits spectra between two compounds together: shared bands, a share of each in every spectrum, and where the curves cross. The first and the last are taken as pure. Nothing is stored.',
    )
    .argument('<file...>', 'exported spectra in the order of the series')
    .option('--json', 'one JSON object per spectrum')
    .addHelpText('after', EXAMPLE)
    .action((files: string[], options: { readonly json?: true }) => mix(files, options.json === true))
}

const mix = (files: readonly string[], asJson: boolean): void => {
  const faults: Fault[] = []
  const rows = files.flatMap((file) => rowsOf(file, faults))
  // a series with a gap in it would be told wrongly
  if (faults.length > 0) throw new FaultError(faults, exitOf(faults))
  const mixture = mixtureOf(rows.map(({ spectrum }) => spectrum))
  if (mixture.kind === 'none')
    throw new FaultError(
      [
        {
          code: 'no-mixture',
          place: { at: files[0] ?? 'mixture' },
          what: mixture.why,
          remedy: 'give the spectra in the order of the series, the pure compounds first and last',
        },
      ],
      EXIT.unreadable,
    )
  if (asJson) {
    rows.forEach(({ file, index }, s) => {
      printJson({ file, index, ...shareJson(mixture.shares[s]!), crossings: mixture.crossings, flags: mixture.flags })
    })
    return
  }
  const width = Math.max(4, ...rows.map(({ file }) => printable(file).length))
  printLine(`${'file'.padEnd(width)}  first              last               sum      rms`)
  rows.forEach(({ file }, s) => {
    printLine(`${printable(file).padEnd(width)}  ${shareText(mixture.shares[s]!)}`)
  })
  for (const remark of mixture.remarks) printLine(remark)
}

const rowsOf = (file: string, faults: Fault[]): readonly Row[] =>
  spectraOf(file, {}, faults).flatMap((raw) => {
    const prepared = prepareSpectrum(raw, OPTIONS)
    if (prepared.kind === 'prepared') return [{ file, index: raw.index, spectrum: prepared.spectrum }]
    faults.push(...prepared.faults)
    return []
  })

const rounded = (value: number) => Number(value.toFixed(5))

const shareJson = ({ first, uFirst, last, uLast, sum, rms }: Share) => ({
  share_first: rounded(first),
  u_share_first: rounded(uFirst),
  share_last: rounded(last),
  u_share_last: rounded(uLast),
  share_sum: rounded(sum),
  rms: Number(rms.toPrecision(6)),
})

const shareText = ({ first, uFirst, last, uLast, sum, rms }: Share): string => {
  const pair = (value: number, u: number) => `${value.toFixed(4)} +- ${u.toFixed(4)}`.padEnd(19)
  return `${pair(first, uFirst)}${pair(last, uLast)}${sum.toFixed(4)}   ${rms.toFixed(5)}`
}
