import type { Command } from 'commander'
import { dataPlaceOf } from '../daemon/dataPlace.ts'
import { type Health, healthOf } from '../daemon/health.ts'
import { EXIT } from '../fault.ts'
import { openStoreReadOnly } from '../store/index.ts'
import { exitWith, printJson, printLine } from './print.ts'
import { printable } from './printable.ts'

export const addStatus = (program: Command): void => {
  program
    .command('status')
    .summary('is it alive, what waits, what failed')
    .description(
      'Says whether the daemon is alive, what waits and what failed. Exit 0: healthy; 1: degraded, with the reasons.',
    )
    .option('--json', 'one JSON object')
    .option('--config <folder>', 'configuration folder')
    .addHelpText(
      'after',
      `
Example:
  tendq status --config /etc/tendq || echo "somebody should look"`,
    )
    .action((options: { json?: true; config?: string }) => {
      const config = dataPlaceOf(options.config)
      const db = openStoreReadOnly(config.dataFolder)
      try {
        const health = healthOf(db, config.dataFolder, Date.now())
        if (options.json) printJson(health)
        else printHealth(health)
        exitWith(health.reasons.length === 0 ? EXIT.ok : EXIT.degraded)
      } finally {
        db.close()
      }
    })
}

const list = (title: string, lines: readonly string[]): void => {
  if (lines.length === 0) return
  printLine(title)
  for (const line of lines) printLine(`  ${line}`)
}

const printHealth = (health: Health): void => {
  printLine(health.reasons.length === 0 ? 'healthy' : 'degraded')
  list(
    'because',
    health.reasons.map((reason) => printable(reason)),
  )
  printLine(`daemon       ${health.daemon === null ? 'none is running' : printable(health.daemon)}`)
  printLine(
    `spectra      ${health.spectra} stored, the last at ${health.last_stored_at ?? '–'}; ${health.pending} wait to be analysed`,
  )
  if (health.repeated > 0)
    printLine(`repeats      ${health.repeated} files of the last day held bytes that had come before`)
  printLine(
    `letters      ${health.letters.waiting} wait${health.letters.held > 0 ? ` (${health.letters.held} for the end of quiet hours or the next digest)` : ''}, ${health.letters.failed} given up`,
  )
  printLine(`daily letter ${health.daily === null ? 'turned off' : `last sent at ${health.daily.last_sent_at ?? '–'}`}`)
  printLine(`alarms       ${health.alarms} not back to normal`)
  list(
    'instruments',
    health.instruments.map(
      ({ instrument, reachable, last_scan_at, waiting }) =>
        `${printable(instrument)}: ${reachable ? 'drop folder reachable' : 'drop folder NOT reachable'}, last scan ${last_scan_at ?? 'never'}, ${waiting.length} waiting${waiting.length === 0 ? '' : ` (${waiting.slice(0, 5).map(printable).join(', ')}${waiting.length > 5 ? ', …' : ''})`}`,
    ),
  )
  list(
    'set aside (`tendq inspect FILE` explains)',
    health.set_aside.map(
      ({ instrument, file, received_at, reason }) =>
        `${received_at} ${printable(instrument)} ${printable(file)}: ${printable(reason ?? '')}`,
    ),
  )
  list(
    'shelved, silent for a time',
    health.shelved.map((alarm) => printable(alarm)),
  )
  list(
    'out of service, silent for a time',
    health.out_of_service.map((subject) => printable(subject)),
  )
  list(
    'gathering a reference or history, no fault',
    health.gathering.map((sample) => printable(sample)),
  )
  list(
    'samples that no study claims',
    health.unknown_samples.map((sample) => printable(sample)),
  )
}
