import type { Command } from 'commander'
import { type DecisionOptions, decideBeside, refusal, sayOf, spectrumOf, whenFollowed, withWho } from './decision.ts'
import { printLine } from './print.ts'

export const addExclude = (program: Command): void => {
  withWho(program.command('exclude'))
    .summary('keep a spectrum visible but out of statistics')
    .description(
      'Keeps a spectrum visible but out of references, windows and charts. The newest spectrum that still counts is judged again, so that no alarm goes on ringing for the excluded one.',
    )
    .argument('<spectrum>', 'its number in the history')
    .addHelpText('after', '\nExample:\n  tendq exclude 17 --by Ines --why "measured an empty cell"')
    .action((spectrum: string, options: DecisionOptions) => decide('exclude', spectrum, options))
}

export const addRestore = (program: Command): void => {
  withWho(program.command('restore'))
    .summary('take an exclusion back')
    .description('Takes a spectrum into references, windows and charts again.')
    .argument('<spectrum>', 'its number in the history')
    .addHelpText('after', '\nExample:\n  tendq restore 17 --by Ines --why "it was the right cell after all"')
    .action((spectrum: string, options: DecisionOptions) => decide('restore', spectrum, options))
}

const decide = (what: 'exclude' | 'restore', text: string, options: DecisionOptions): void => {
  const spectrum = decideBeside(options, (store) => {
    const found = spectrumOf(text, store)
    if (store.decisions.isExcluded(found.id) === (what === 'exclude'))
      throw refusal(
        `spectrum ${found.id}`,
        what === 'exclude' ? 'it is excluded already' : 'it is not excluded',
        'nothing needs to be done; `tendq history` marks what is excluded',
      )
    store.records.decide(Date.now(), options.by, what, `spectrum ${found.id}`, options.why)
    return found
  })
  printLine(
    what === 'exclude' ? `${sayOf(spectrum)} stays visible and no longer counts` : `${sayOf(spectrum)} counts again`,
  )
  if (spectrum.sample !== null)
    printLine(`the newest spectrum that counts is judged again: ${whenFollowed(options.config)}`)
}
