import type { Command } from 'commander'
import { decideBeside, isoTime, refusal, whenFollowed, withWho } from './decision.ts'
import { type SubjectOptions, subjectOf, withSubject } from './outOfService.ts'
import { printLine } from './print.ts'
import { printable } from './printable.ts'

export const addReturnToService = (program: Command): void => {
  withWho(withSubject(program.command('return-to-service')))
    .summary('end a time out of service early')
    .description(
      'Ends the time out of service of an instrument, a sample or a study now. Where none is in force, those set ahead are called off.',
    )
    .addHelpText(
      'after',
      '\nExample:\n  tendq return-to-service --instrument uv1 --by Ines --why "the lamp is in, baseline is good"',
    )
    .action((options: SubjectOptions) => takeBack(options))
}

const takeBack = (options: SubjectOptions): void => {
  const { of, subject } = subjectOf(options)
  const now = Date.now()
  const ended = decideBeside(options, (store) => {
    const all = store.decisions.periodsNotOver(now)
    const own = all.filter((period) => period.of === of && period.subject === subject)
    const inForce = own.filter(({ since }) => since <= now)
    const periods = inForce.length > 0 ? inForce : own
    if (periods.length === 0)
      throw refusal(
        `${of} ${subject}`,
        'it is not out of service, and nothing is set ahead',
        all.length === 0
          ? 'nothing is out of service'
          : `there are: ${all.map((period) => `${period.of} ${printable(period.subject)}`).join(', ')}`,
      )
    const decision = store.records.decide(now, options.by, 'return-to-service', `${of} ${subject}`, options.why)
    for (const { id } of periods) store.decisions.returnToService(decision, id, now)
    return periods
  })
  for (const { since, until } of ended)
    printLine(
      since <= now
        ? `${of} ${printable(subject)} is back in service (it was out until ${isoTime(until)})`
        : `${of} ${printable(subject)}: called off from ${isoTime(since)} until ${isoTime(until)}`,
    )
  printLine(`its alarms show what is so: ${whenFollowed(options.config)}`)
}
