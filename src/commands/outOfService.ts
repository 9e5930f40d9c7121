import type { Command } from 'commander'
import { type Config, findConfigFolder, loadConfig, studyOf } from '../config/index.ts'
import { dataPlaceOf } from '../daemon/dataPlace.ts'
import type { ServiceSubject } from '../store/decisions.ts'
import type { Store } from '../store/index.ts'
import { type DecisionOptions, decideBeside, isoTime, refusal, timeMs, withWho } from './decision.ts'
import { printLine, usageFault } from './print.ts'
import { printable } from './printable.ts'

export interface SubjectOptions extends DecisionOptions {
  readonly instrument?: string
  readonly sample?: string
  readonly study?: string
}

interface Options extends SubjectOptions {
  readonly from?: string
  readonly until: string
}

/** Nothing is silent for ever: what takes longer is said anew. */
const LONGEST_DAYS = 366
const DAY_MS = 86_400_000

export const addOutOfService = (program: Command): void => {
  withWho(withSubject(program.command('out-of-service')))
    .summary('an instrument, a sample or a study is out of service until a time')
    .description(
      'Silences the alarms of an instrument, a sample or a study until a time, which may lie ahead. They are followed meanwhile; when the time is over each shows what is so. A sample’s alarm is silent when the sample, its study, or every instrument it rings on is out of service.',
    )
    .option('--from <time>', 'when it begins; now, if left out')
    .requiredOption('--until <time>', `when it ends, at most ${LONGEST_DAYS} days later`)
    .addHelpText(
      'after',
      `
Example:
  tendq out-of-service --instrument uv1 --until 17:00 --by Ines --why "new lamp"
  tendq out-of-service --study aging-40 --from 2026-08-01 --until 2026-08-15 --by Ines --why "oven is moved"`,
    )
    .action((options: Options) => takeOut(options))
}

export const withSubject = (command: Command): Command =>
  command
    .option('--instrument <name>', 'an instrument, and what is measured on it')
    .option('--sample <name>', 'a sample')
    .option('--study <name>', 'a study with all its samples')

/** The one subject that the options name. */
export const subjectOf = (options: SubjectOptions): { readonly of: ServiceSubject; readonly subject: string } => {
  const named = (['instrument', 'sample', 'study'] as const).flatMap((of) => {
    const subject = options[of]
    return subject === undefined ? [] : [{ of, subject }]
  })
  const [one, other] = named
  if (one === undefined || other !== undefined)
    throw usageFault(
      '--instrument, --sample, --study',
      `${named.length === 0 ? 'none' : 'more than one'} of them is given`,
      'name one instrument, one sample or one study; a second one takes a second command',
    )
  return one
}

const takeOut = (options: Options): void => {
  const { of, subject } = subjectOf(options)
  const { timeZone } = dataPlaceOf(options.config)
  const now = Date.now()
  const since = options.from === undefined ? now : Math.max(now, timeMs('--from', options.from, timeZone))
  const until = timeMs('--until', options.until, timeZone)
  if (until <= now)
    throw usageFault('--until', `${options.until} is over (${isoTime(until)})`, 'name a time that lies ahead')
  if (until <= since)
    throw usageFault('--until', `it is not after the beginning (${isoTime(since)})`, 'let it end after it begins')
  if (until - since > LONGEST_DAYS * DAY_MS)
    throw usageFault(
      '--until',
      `${isoTime(until)} is more than ${LONGEST_DAYS} days after the beginning`,
      'nothing is silent for ever: name an earlier time, and say it anew then',
    )
  decideBeside(options, (store) => {
    mustBeKnown(of, subject, options.config, store)
    const decision = store.records.decide(now, options.by, 'out-of-service', `${of} ${subject}`, options.why)
    store.decisions.takeOutOfService(decision, { of, subject, since, until })
  })
  printLine(
    `${of} ${printable(subject)} is out of service ${since > now ? `from ${isoTime(since)} ` : ''}until ${isoTime(until)}, by ${printable(options.by)}`,
  )
  printLine('its alarms are silent then, and show what is so at the end; `tendq return-to-service` ends it early')
}

const mustBeKnown = (of: ServiceSubject, subject: string, option: string | undefined, store: Store): void => {
  if (of === 'sample' && store.spectra.instrumentsOf(subject).length > 0) return
  const loaded = loadConfig(findConfigFolder(option), () => [])
  // with a faulty configuration on the disk the daemon runs on under the old one: a name is then taken as it is
  if (loaded.kind === 'refused' || isIn(loaded.config, of, subject)) return
  const names = namesOf(loaded.config, of)
  throw refusal(
    `--${of}`,
    of === 'sample' ? `no study claims ${subject}, and none of its spectra is stored` : `there is no ${of} ${subject}`,
    names.length === 0 ? 'the configuration names none' : `the configuration names ${names.join(', ')}`,
  )
}

const isIn = (config: Config, of: ServiceSubject, subject: string): boolean =>
  of === 'sample' ? studyOf(config, subject) !== null : namesOf(config, of).includes(subject)

const namesOf = ({ instruments, studies }: Config, of: ServiceSubject): readonly string[] => {
  if (of === 'instrument') return instruments.map(({ name }) => name)
  return of === 'study' ? studies.map(({ name }) => name) : studies.flatMap(({ samples }) => samples.map((s) => s.name))
}
