import { existsSync } from 'node:fs'
import { join } from 'node:path'
import type { Command } from 'commander'
import { DateTime } from 'luxon'
import { sayPath } from '../config/files.ts'
import { fits } from '../config/index.ts'
import { type RoomInForce, roomOf } from '../daemon/room.ts'
import { EXIT, FaultError } from '../fault.ts'
import { type Injection, parseInjection } from '../rehearsal/injection.ts'
import { openStoreReadOnly } from '../store/index.ts'
import { usageFault } from './print.ts'
import { printable } from './printable.ts'
import { progressLine } from './progressLine.ts'
import { historyOn } from './rehearseHistory.ts'
import { printRehearsalJson } from './rehearseJson.ts'
import { type Rehearsal, type RuleSet, runRehearsal } from './rehearseRun.ts'
import { printRehearsal } from './rehearseText.ts'

interface Options {
  readonly config?: string
  readonly rules?: string
  readonly against?: string
  readonly since?: string
  readonly until?: string
  readonly sample?: string
  readonly inject?: string
  readonly course?: string
  readonly json?: true
}

export const addRehearse = (program: Command): void => {
  program
    .command('rehearse')
    .summary('run the rules over stored history without touching it')
    .description(
      'Runs the rules over the stored history, spectrum by spectrum in the order of measurement, and tells which alarms they would have raised, when, and how often. Reads only: nothing is stored, no letter goes out.',
    )
    .option('--rules <place>', 'a file of rules, or a folder of such files, in place of those of the configuration')
    .option('--against <place>', 'a second set of rules, shown beside the first')
    .option('--since <time>', 'count what was measured at this time or later (ISO 8601)')
    .option('--until <time>', 'end the history at this time')
    .option('--sample <name>', 'only this sample; * and ? stand for others. Rules of instruments are left out then')
    .option('--inject <change>', 'LIGAND:NUMBER=PERCENT%, a made-up conversion added to the stored spectra')
    .option(
      '--course <course>',
      'linear: the change grows from the middle of a history to its end; step: at once',
      'linear',
    )
    .option('--json', 'one JSON object a line: each alarm, then a summary')
    .option('--config <folder>', 'configuration folder')
    .addHelpText(
      'after',
      `
Examples:
  tendq rehearse                                       what the rules in force would have raised
  tendq rehearse --rules draft.yaml --against config/rules
  tendq rehearse --inject "${EXAMPLE}"                  one ligand replaced by water in 5 % of the compound: how soon is it seen?`,
    )
    .action(rehearse)
}

const EXAMPLE = 'H2O:1=5%'

const rehearse = (options: Options): void => {
  const injection = injectionOf(options)
  const { room, sets } = ruleSets(options)
  const { timeZone, dataFolder } = room.config
  const asked = {
    isMeant: (sample: string) => options.sample === undefined || fits(options.sample, sample),
    withInstruments: options.sample === undefined,
    since: timeOf('--since', options.since, timeZone) ?? -Infinity,
    until: timeOf('--until', options.until, timeZone) ?? Infinity,
    injection,
  }
  const db = openStoreReadOnly(dataFolder)
  const progress = progressLine()
  try {
    const rehearsal = runRehearsal(sets, asked, room, historyOn(db), progress.show)
    progress.clear()
    refuseNothing(options, rehearsal)
    if (options.json) printRehearsalJson(sets, injection, rehearsal)
    else printRehearsal(sets, injection, rehearsal)
  } finally {
    progress.clear()
    db.close()
  }
}

const injectionOf = ({ inject, course }: Options): Injection | null => {
  if (course !== 'linear' && course !== 'step')
    throw usageFault('--course', `"${course}" is no course`, 'write linear or step')
  if (inject === undefined) return null
  const parsed = parseInjection(inject)
  if (parsed === null)
    throw usageFault(
      '--inject',
      `"${inject}" is no change`,
      `write LIGAND:NUMBER=PERCENT%, as in --inject "${EXAMPLE}": one ligand replaced by water in 5 % of the compound`,
    )
  return { ...parsed, course }
}

/** The rules to rehearse, one or two sets of them, each with every fault of its own file. */
const ruleSets = (options: Options): { readonly room: RoomInForce; readonly sets: readonly RuleSet[] } => {
  const roomWith = (option: string, place: string | undefined): RoomInForce => {
    if (place !== undefined && !existsSync(place)) throw noSuchFile(option, place)
    return roomOf(options.config, { rulesFrom: place ?? null })
  }
  const room = roomWith('--rules', options.rules)
  const own = { from: options.rules ?? sayPath(join(room.config.folder, 'rules')), rules: room.rules }
  if (options.against === undefined) return { room, sets: [own] }
  return { room, sets: [own, { from: options.against, rules: roomWith('--against', options.against).rules }] }
}

const noSuchFile = (option: string, place: string): FaultError =>
  new FaultError(
    [
      {
        code: 'no-such-file',
        place: { at: option },
        what: `there is no file or folder ${place}`,
        remedy: 'name a file of rules',
      },
    ],
    EXIT.noInput,
  )

const timeOf = (option: string, text: string | undefined, zone: string): number | null => {
  if (text === undefined) return null
  const time = DateTime.fromISO(text, { zone })
  if (!time.isValid) throw usageFault(option, `${text} is no time`, 'write it as 2026-03-02 or 2026-03-02T09:00:00Z')
  return time.toMillis()
}

/** A sample that is not there, and a change that suits none of the samples, would look like perfect quiet. */
const refuseNothing = ({ sample, inject }: Options, { samples, unclaimed, injected, skipped }: Rehearsal): void => {
  if (sample !== undefined && samples.length === 0) {
    const what = unclaimed.length > 0 ? 'no study claims it, so no rule judges it' : 'no spectrum of it is stored'
    throw new FaultError(
      [
        {
          code: 'no-such-sample',
          place: { at: printable(sample) },
          what,
          remedy: '`tendq status` tells what is stored',
        },
      ],
      EXIT.noInput,
    )
  }
  if (inject !== undefined && samples.length > 0 && injected.length === 0) {
    const whys = [...new Set(skipped.map(({ why }) => why))].join('; ')
    throw usageFault('--inject', `into no sample: ${whys}`, `another ligand, or a longer history, as for "${EXAMPLE}"`)
  }
}
