import type { Command } from 'commander'
import { DateTime } from 'luxon'
import { dataPlaceOf } from '../daemon/dataPlace.ts'
import { EXIT, type ExitCode, FaultError } from '../fault.ts'
import { openStoreBeside, type Store, storeOn, whoHolds } from '../store/index.ts'
import type { StoredSpectrum } from '../store/spectra.ts'
import { usageFault } from './print.ts'
import { printable } from './printable.ts'

/** Who and why: every decision is kept with both, for ever. */
export interface DecisionOptions {
  readonly by: string
  readonly why: string
  readonly config?: string
}

export const withWho = (command: Command): Command =>
  command
    .requiredOption('--by <who>', 'your name')
    .requiredOption('--why <text>', 'the reason, kept for ever')
    .option('--config <folder>', 'configuration folder')

/** Does the work in one short transaction, beside a daemon that may be running. Nothing is written when it throws. */
export const decideBeside = <T>({ by, why, config }: DecisionOptions, work: (store: Store) => T): T => {
  for (const [option, value] of Object.entries({ '--by': by, '--why': why }))
    if (value.trim() === '') throw usageFault(option, 'it is empty', 'a decision is kept with who and why')
  const store = storeOn(openStoreBeside(dataPlaceOf(config).dataFolder))
  try {
    return store.atomically(() => work(store))
  } finally {
    store.close()
  }
}

/** The decision cannot be taken as things are. */
export const refusal = (at: string, what: string, remedy: string, exit: ExitCode = EXIT.usage): FaultError =>
  new FaultError([{ code: 'decision', place: { at: printable(at) }, what: printable(what), remedy }], exit)

/** The spectrum of this number, as the history shows it. */
export const spectrumOf = (text: string, store: Store): StoredSpectrum => {
  const id = Number(text)
  if (!Number.isInteger(id) || id < 1)
    throw usageFault('SPECTRUM', `${text} is no number of a spectrum`, '`tendq history SAMPLE` shows them')
  const found = store.spectra.get(id)
  if (found === null)
    throw refusal(`spectrum ${id}`, 'there is no such spectrum', '`tendq history SAMPLE` shows the numbers')
  return found
}

export const sayOf = ({ id, sample, instrument, measuredAt }: StoredSpectrum): string =>
  `spectrum ${id} of ${sample === null ? '(no name)' : printable(sample)} (${printable(instrument)}, ${isoTime(measuredAt)})`

export const isoTime = (ms: number): string => `${new Date(ms).toISOString().slice(0, 19)}Z`

/** When the consequences are drawn: by the running daemon, or when the next one starts. */
export const whenFollowed = (option: string | undefined): string =>
  whoHolds(dataPlaceOf(option).dataFolder) === null
    ? 'no daemon is running: it follows at its next start'
    : 'the daemon follows within seconds'

/** A time as people write it, in the room's zone where it names none. Epoch milliseconds. */
export const timeMs = (option: string, text: string, timeZone: string): number => {
  const time = DateTime.fromISO(text, { zone: timeZone })
  if (!time.isValid)
    throw usageFault(
      option,
      `${text} is no time`,
      'write it as 2026-03-02T17:00, as 2026-03-02T09:00:00Z, or as 17:00 for today',
    )
  return time.toMillis()
}
