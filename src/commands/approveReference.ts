import type { Command } from 'commander'
import { InvalidArgumentError } from 'commander'
import { fixReference, type ReferenceFixed } from '../daemon/approve.ts'
import { roomOf } from '../daemon/room.ts'
import { type DecisionOptions, decideBeside, refusal, whenFollowed, withWho } from './decision.ts'
import { printLine } from './print.ts'
import { printable } from './printable.ts'

interface Options extends DecisionOptions {
  readonly instrument?: string
  readonly newest?: true
  readonly occasions?: number
}

export const addApproveReference = (program: Command): void => {
  withWho(program.command('approve-reference'))
    .summary('fix the reference of a sample')
    .description(
      'Fixes what a sample is compared with on its first occasions, also where those have a slope and the reference is refused for it. Excluded spectra are left out. From then on the sample is judged against this reference.',
    )
    .argument('<sample>')
    .option('--instrument <name>', 'only on this instrument; otherwise on each that measures the sample')
    .option('--newest', 'the newest occasions in place of the first')
    .option('--occasions <n>', 'how many; otherwise as many as the study says', wholeNumber)
    .addHelpText(
      'after',
      `
Example:
  tendq approve-reference AGE40-1 --by Ines --why "the slope is the cell warming up, see notebook 12"
  tendq approve-reference AGE40-1 --newest --by Ines --why "new cell since March"`,
    )
    .action((sample: string, options: Options) => approve(sample, options))
}

const wholeNumber = (text: string): number => {
  const n = Number(text)
  if (!Number.isInteger(n) || n < 1) throw new InvalidArgumentError('a whole number from 1 on')
  return n
}

const approve = (sample: string, options: Options): void => {
  const room = roomOf(options.config)
  const fixed = decideBeside(options, (store): readonly Extract<ReferenceFixed, { kind: 'fixed' }>[] => {
    const measuring = store.spectra.instrumentsOf(sample)
    const asked = options.instrument === undefined ? measuring : measuring.filter((one) => one === options.instrument)
    if (asked.length === 0)
      throw refusal(
        sample,
        measuring.length === 0 ? 'no spectrum of this sample is stored' : `${options.instrument} has not measured it`,
        measuring.length === 0
          ? '`tendq status` tells what is stored'
          : `it was measured on ${measuring.map(printable).join(', ')}`,
      )
    const at = Date.now()
    const decision = store.records.decide(at, options.by, 'approve-reference', `sample ${sample}`, options.why)
    const outcomes = asked.map((instrument) =>
      fixReference({ sample, instrument, decision, at, ...options }, store, room),
    )
    const done = outcomes.flatMap((one) => (one.kind === 'fixed' ? [one] : []))
    const [refused] = outcomes.flatMap((one) => (one.kind === 'refused' ? [one] : []))
    // on several instruments, those where there is nothing to approve do not hold up the others
    if (done.length === 0) throw refusal(sample, refused!.why, refused!.remedy)
    return done
  })
  for (const { instrument, spectra, values } of fixed) {
    printLine(
      `the reference of ${printable(sample)} on ${printable(instrument)} is fixed on ${spectra.length === 1 ? 'spectrum' : 'spectra'} ${spectra.join(', ')}: ${values}`,
    )
  }
  printLine(`its newest spectrum is judged against it: ${whenFollowed(options.config)}`)
}
