import type { Command } from 'commander'
import { dataPlaceOf } from '../daemon/room.ts'
import { EXIT, FaultError } from '../fault.ts'
import { openStoreBeside, storeOn } from '../store/index.ts'
import { printLine, usageFault } from './print.ts'

interface Options {
  readonly by: string
  readonly why: string
  readonly config?: string
}

export const addExclude = (program: Command): void => {
  program
    .command('exclude')
    .summary('keep a spectrum visible but out of statistics')
    .description('Keeps a spectrum visible but out of references and windows. The next spectrum is judged without it.')
    .argument('<spectrum>', 'its number in the history')
    .requiredOption('--by <who>', 'your name')
    .requiredOption('--why <text>', 'the reason, kept for ever')
    .option('--config <folder>', 'configuration folder')
    .addHelpText('after', '\nExample:\n  tendq exclude 17 --by Ines --why "measured an empty cell"')
    .action((spectrum: string, options: Options) => decide('exclude', spectrum, options))
}

export const addRestore = (program: Command): void => {
  program
    .command('restore')
    .summary('take an exclusion back')
    .description('Takes a spectrum into references and windows again.')
    .argument('<spectrum>', 'its number in the history')
    .requiredOption('--by <who>', 'your name')
    .requiredOption('--why <text>', 'the reason, kept for ever')
    .option('--config <folder>', 'configuration folder')
    .addHelpText('after', '\nExample:\n  tendq restore 17 --by Ines --why "it was the right cell after all"')
    .action((spectrum: string, options: Options) => decide('restore', spectrum, options))
}

/** A row among the decisions: statistics follow with the next spectrum that is judged. */
const decide = (what: 'exclude' | 'restore', text: string, { by, why, config }: Options): void => {
  const id = Number(text)
  if (!Number.isInteger(id) || id < 1)
    throw usageFault('SPECTRUM', `${text} is no number of a spectrum`, '`tendq history SAMPLE --json` shows them')
  for (const [option, value] of Object.entries({ '--by': by, '--why': why }))
    if (value.trim() === '') throw usageFault(option, 'it is empty', 'a decision is kept with who and why')
  const store = storeOn(openStoreBeside(dataPlaceOf(config).dataFolder))
  try {
    store.atomically(() => {
      if (store.spectra.get(id) === null)
        throw new FaultError(
          [
            {
              code: 'no-such-spectrum',
              place: { at: `spectrum ${id}` },
              what: 'there is no such spectrum',
              remedy: '`tendq history SAMPLE --json` shows the numbers',
            },
          ],
          EXIT.usage,
        )
      store.records.decide(Date.now(), by, what, `spectrum ${id}`, why)
    })
  } finally {
    store.close()
  }
  printLine(
    what === 'exclude'
      ? `spectrum ${id} stays visible and is out of statistics; the next spectrum of its sample is judged without it`
      : `spectrum ${id} counts again`,
  )
}
