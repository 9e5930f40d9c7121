import type { Command } from 'commander'
import { DateTime } from 'luxon'
import { dataPlaceOf } from '../daemon/dataPlace.ts'
import { EXIT, FaultError } from '../fault.ts'
import { openStoreReadOnly } from '../store/index.ts'
import { stringify } from './csv.ts'
import { printJson, printLine, usageFault } from './print.ts'
import { printable } from './printable.ts'

interface Options {
  readonly csv?: true
  readonly json?: true
  readonly since?: string
  readonly until?: string
  readonly config?: string
}

interface HistoryRow {
  readonly [column: string]: string | number | null
}

export const addHistory = (program: Command): void => {
  program
    .command('history')
    .summary('the stored series of a sample')
    .description('Prints the stored series of a sample, oldest first.')
    .argument('<sample>')
    .option('--csv', 'comma-separated, with the columns of the view `history`')
    .option('--json', 'one JSON object a line, with the columns of the view `history`')
    .option('--since <time>', 'measured at this time or later (ISO 8601)')
    .option('--until <time>', 'measured at this time or earlier')
    .option('--config <folder>', 'configuration folder')
    .addHelpText(
      'after',
      `
Example:
  tendq history AGE40-1 --since 2026-03-02
  tendq history AGE40-1 --csv > age40-1.csv`,
    )
    .action((sample: string, options: Options) => showHistory(sample, options))
}

const showHistory = (sample: string, options: Options): void => {
  const config = dataPlaceOf(options.config)
  const since = timeOf('--since', options.since, config.timeZone)
  const until = timeOf('--until', options.until, config.timeZone)
  const db = openStoreReadOnly(config.dataFolder)
  try {
    const rows = db
      .prepare<[string, string, string], HistoryRow>(
        `SELECT * FROM history WHERE sample = ? AND measured_at >= ? AND measured_at <= ? ORDER BY measured_at, spectrum`,
      )
      .all(sample, since ?? '', until ?? '9999')
    if (rows.length === 0 && since === null && until === null) throw unknownSample(sample, db)
    if (options.json) for (const row of rows) printJson(withTypes(row))
    else if (options.csv) printCsv(rows)
    else printTable(rows)
  } finally {
    db.close()
  }
}

const timeOf = (option: string, text: string | undefined, zone: string): string | null => {
  if (text === undefined) return null
  const time = DateTime.fromISO(text, { zone })
  if (!time.isValid) throw usageFault(option, `${text} is no time`, 'write it as 2026-03-02 or 2026-03-02T09:00:00Z')
  return time.toUTC().toISO({ suppressMilliseconds: true })
}

const unknownSample = (sample: string, db: ReturnType<typeof openStoreReadOnly>): FaultError => {
  const names = db
    .prepare<[], { sample: string }>(
      `SELECT DISTINCT sample FROM spectrum_now WHERE sample IS NOT NULL ORDER BY sample LIMIT 20`,
    )
    .all()
    .map((row) => printable(row.sample))
  const remedy = names.length === 0 ? 'nothing has been stored yet' : `there are: ${names.join(', ')}`
  return new FaultError(
    [
      {
        code: 'no-such-sample',
        place: { at: printable(sample) },
        what: 'no spectrum of this sample is stored',
        remedy,
      },
    ],
    EXIT.noInput,
  )
}

const withTypes = (row: HistoryRow) => ({
  ...row,
  excluded: row.excluded === 1,
  flags: flagsOf(row),
})

const flagsOf = ({ flags }: HistoryRow): readonly string[] =>
  typeof flags === 'string' ? (JSON.parse(flags) as string[]) : []

const printCsv = (rows: readonly HistoryRow[]): void => {
  const [first] = rows
  if (first === undefined) return
  const columns = Object.keys(first)
  printLine(stringify(columns))
  for (const row of rows) printLine(stringify(columns.map((column) => row[column] ?? null)))
}

const number = (value: string | number | null | undefined, digits: number, width: number): string =>
  (typeof value === 'number' ? value.toFixed(digits) : '–').padStart(width)

const printTable = (rows: readonly HistoryRow[]): void => {
  printLine(
    `${'no.'.padStart(5)} ${'measured at'.padEnd(20)} ${'instrument'.padEnd(10)} ${'ν1 cm⁻¹'.padStart(9)} ${'ν2 cm⁻¹'.padStart(9)} ${'Δ cm⁻¹'.padStart(9)} ${'u'.padStart(6)} ${'B cm⁻¹'.padStart(8)} ${'u'.padStart(5)}  judgement  flags`,
  )
  for (const row of rows) {
    const flags = [
      ...(row.excluded === 1 ? ['excluded'] : []),
      ...(typeof row.came_as === 'string' ? [`came as ${printable(row.came_as)}`] : []),
      ...flagsOf(row),
    ].join(', ')
    printLine(
      `${String(row.spectrum).padStart(5)} ${String(row.measured_at).padEnd(20)} ${printable(String(row.instrument)).padEnd(10)} ${number(row.nu1_cm1, 1, 9)} ${number(row.nu2_cm1, 1, 9)} ${number(row.delta_cm1, 1, 9)} ${number(row.u_delta_cm1, 1, 6)} ${number(row.b_cm1, 1, 8)} ${number(row.u_b_cm1, 1, 5)}  ${String(row.judgement ?? '–').padEnd(9)}  ${flags}`.trimEnd(),
    )
  }
}
