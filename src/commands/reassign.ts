import type { Command } from 'commander'
import { findConfigFolder, loadConfig, studyOf } from '../config/index.ts'
import { type DecisionOptions, decideBeside, refusal, sayOf, spectrumOf, whenFollowed, withWho } from './decision.ts'
import { printLine, usageFault } from './print.ts'
import { printable } from './printable.ts'

interface Options extends DecisionOptions {
  readonly sample: string
}

export const addReassign = (program: Command): void => {
  withWho(program.command('reassign'))
    .summary('mend a wrong sample name')
    .description(
      'Gives a spectrum the name of the sample that it really is of. It is analysed anew by that sample’s species and recipe; the file, the name it came with and the old analysis stay in the record. Both samples are judged again.',
    )
    .argument('<spectrum>', 'its number in the history')
    .requiredOption('--sample <name>', 'the right sample')
    .addHelpText(
      'after',
      '\nExample:\n  tendq reassign 17 --sample AGE40-2 --by Ines --why "two vials swapped, see notebook 12"',
    )
    .action((spectrum: string, options: Options) => reassign(spectrum, options))
}

const reassign = (text: string, options: Options): void => {
  const sample = options.sample.trim()
  if (sample === '') throw usageFault('--sample', 'it is empty', 'name the sample that the spectrum is of')
  const spectrum = decideBeside(options, (store) => {
    const found = spectrumOf(text, store)
    if (found.sample === sample)
      throw refusal(`spectrum ${found.id}`, `it is of ${sample} already`, 'nothing needs to be done')
    const decision = store.records.decide(Date.now(), options.by, 'reassign', `spectrum ${found.id}`, options.why)
    store.decisions.reassign(decision, { spectrum: found.id, was: found.sample, sample })
    return found
  })
  printLine(`${sayOf(spectrum)} is now of ${printable(sample)}`)
  const study = claimedBy(sample, options.config)
  printLine(
    study === null
      ? `no study claims ${printable(sample)}: the spectrum is kept and not judged; name the sample in a study if it should be`
      : study === undefined
        ? `the configuration has faults now (\`tendq check\`): whether a study claims ${printable(sample)} is seen when it is mended`
        : `it is analysed anew as study ${study} says, and judged: ${whenFollowed(options.config)}`,
  )
}

/** The study's name; null where none claims the sample; undefined where the configuration cannot be read just now. */
const claimedBy = (sample: string, option: string | undefined): string | null | undefined => {
  const loaded = loadConfig(findConfigFolder(option), () => [])
  return loaded.kind === 'loaded' ? (studyOf(loaded.config, sample)?.name ?? null) : undefined
}
