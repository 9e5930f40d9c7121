import { userInfo } from 'node:os'
import type { Command } from 'commander'
import { stepAlarm } from '../alarms/index.ts'
import { parseQuantity } from '../config/quantity.ts'
import { dataPlaceOf } from '../daemon/dataPlace.ts'
import { EXIT, FaultError } from '../fault.ts'
import { lifeOf, withLife } from '../store/alarms.ts'
import { openStoreBeside, openStoreReadOnly, storeOn } from '../store/index.ts'
import { printJson, printLine, usageFault } from './print.ts'
import { printable } from './printable.ts'

interface ListOptions {
  readonly json?: true
  readonly all?: true
  readonly config?: string
}

interface DecisionOptions {
  readonly by: string
  readonly note: string
  readonly config?: string
}

interface AlarmRow {
  readonly id: number
  readonly rule: string
  readonly of: string
  readonly subject: string
  readonly priority: string
  readonly state: string
  readonly raised_at: string | null
  readonly message: string
}

export const addAlarms = (program: Command): void => {
  const alarms = program
    .command('alarms')
    .summary('the alarm list')
    .description('Lists alarms that stand, newest first.')
    .option('--all', 'also those that are back to normal')
    .option('--json', 'one JSON object a line, with the columns of the view `alarm_list`')
    .option('--config <folder>', 'configuration folder')
    .addHelpText(
      'after',
      `
Example:
  tendq alarms
  tendq alarms show 3
  tendq alarms acknowledge 3 --by Ines --note "taking a second spectrum"`,
    )
    .action((options: ListOptions) => listAlarms(options))
  alarms
    .command('show')
    .description('Tells the story of one alarm.')
    .argument('<id>')
    .option('--json', 'one JSON object')
    .option('--config <folder>', 'configuration folder')
    .addHelpText('after', '\nExample:\n  tendq alarms show 3')
    .action((id: string, _: unknown, command: Command) => showAlarm(id, command.optsWithGlobals()))
  alarms
    .command('acknowledge')
    .description('Says that a person has seen the alarm. It stays until its cause is gone.')
    .argument('<id>')
    .requiredOption('--by <who>', 'your name')
    .option('--note <text>', 'what you found or will do', '')
    .option('--config <folder>', 'configuration folder')
    .addHelpText('after', '\nExample:\n  tendq alarms acknowledge 3 --by Ines --note "taking a second spectrum"')
    .action((id: string, _: unknown, command: Command) =>
      decide(id, 'acknowledge', command.optsWithGlobals<DecisionOptions>()),
    )
  alarms
    .command('shelve')
    .description('Silences the alarm for a time; it comes back by itself.')
    .argument('<id>')
    .requiredOption('--for <duration>', 'such as 8h or 2d, at most 30 days')
    .requiredOption('--by <who>', 'your name')
    .option('--note <text>', 'why', '')
    .option('--config <folder>', 'configuration folder')
    .addHelpText('after', '\nExample:\n  tendq alarms shelve 3 --for 8h --by Ines --note "oven door repaired tonight"')
    .action((id: string, _: unknown, command: Command) =>
      shelve(id, command.optsWithGlobals<DecisionOptions & { for: string }>()),
    )
  alarms
    .command('unshelve')
    .description('Ends shelving before its time.')
    .argument('<id>')
    .requiredOption('--by <who>', 'your name')
    .option('--note <text>', 'why', '')
    .option('--config <folder>', 'configuration folder')
    .addHelpText('after', '\nExample:\n  tendq alarms unshelve 3 --by Ines')
    .action((id: string, _: unknown, command: Command) =>
      decide(id, 'unshelve', command.optsWithGlobals<DecisionOptions>()),
    )
  alarms
    .command('reset')
    .description('Lets a latched alarm go back to normal, once its condition has cleared and it was acknowledged.')
    .argument('<id>')
    .requiredOption('--by <who>', 'your name')
    .option('--note <text>', 'why', '')
    .option('--config <folder>', 'configuration folder')
    .addHelpText('after', '\nExample:\n  tendq alarms reset 3 --by Ines --note "cell replaced"')
    .action((id: string, _: unknown, command: Command) =>
      decide(id, 'reset', command.optsWithGlobals<DecisionOptions>()),
    )
  for (const command of alarms.commands) command.exitOverride()
}

const listAlarms = (options: ListOptions): void => {
  const db = openStoreReadOnly(dataPlaceOf(options.config).dataFolder)
  try {
    const rows = db
      .prepare<[number], AlarmRow>(
        `SELECT * FROM alarm_list WHERE state <> 'normal' OR ? ORDER BY raised_at DESC, id DESC`,
      )
      .all(options.all ? 1 : 0)
    if (options.json) for (const row of rows) printJson(row)
    else if (rows.length === 0) printLine('no alarm stands')
    else
      for (const row of rows)
        printLine(
          `${String(row.id).padStart(4)}  ${row.priority.padEnd(6)}  ${row.state.padEnd(24)}  ${row.raised_at ?? '–'}  ${row.of} ${printable(row.subject)}: ${printable(row.message)}`,
        )
  } finally {
    db.close()
  }
}

const idOf = (text: string): number => {
  const id = Number(text)
  if (!Number.isInteger(id) || id < 1)
    throw usageFault('ID', `${text} is no number of an alarm`, '`tendq alarms` lists them')
  return id
}

const noSuchAlarm = (id: number): FaultError =>
  new FaultError(
    [
      {
        code: 'no-such-alarm',
        place: { at: `alarm ${id}` },
        what: 'there is no such alarm',
        remedy: '`tendq alarms --all` lists them',
      },
    ],
    EXIT.usage,
  )

const showAlarm = (text: string, options: ListOptions): void => {
  const id = idOf(text)
  const db = openStoreReadOnly(dataPlaceOf(options.config).dataFolder)
  try {
    const row = db.prepare<[number], AlarmRow>(`SELECT * FROM alarm_list WHERE id = ?`).get(id)
    if (row === undefined) throw noSuchAlarm(id)
    const events = db
      .prepare<[number], { at: string; event: string; by: string; note: string }>(
        `SELECT at, event, by, note FROM alarm_events WHERE alarm = ?`,
      )
      .all(id)
    const letters = db
      .prepare<[number], { recipient: string; state: string; sent_at: string | null; last_error: string | null }>(
        `SELECT recipient, state, sent_at, last_error FROM letters WHERE alarm = ?`,
      )
      .all(id)
    if (options.json) {
      printJson({ ...row, events, letters })
      return
    }
    for (const [name, value] of Object.entries(row))
      if (value !== null) printLine(`${name.padEnd(16)} ${printable(String(value))}`)
    printLine('events')
    for (const { at, event, by, note } of events)
      printLine(`  ${at}  ${event.padEnd(20)} ${printable(by)}  ${printable(note)}`.trimEnd())
    printLine('letters')
    for (const letter of letters)
      printLine(
        `  ${printable(letter.recipient)}  ${letter.state}  ${letter.sent_at ?? ''}  ${printable(letter.last_error ?? '')}`.trimEnd(),
      )
  } finally {
    db.close()
  }
}

/** What a person decides about one alarm: a step of its life, an event, a row among the decisions. */
const decide = (
  text: string,
  input: 'acknowledge' | 'shelve' | 'unshelve' | 'reset',
  { by, note, config }: DecisionOptions,
  shelvedUntil: number | null = null,
): void => {
  const id = idOf(text)
  if (by.trim() === '')
    throw usageFault('--by', 'a decision needs a name', `say for example --by ${userInfo().username}`)
  const store = storeOn(openStoreBeside(dataPlaceOf(config).dataFolder))
  try {
    store.atomically(() => {
      const alarm = store.alarms.get(id)
      if (alarm === null) throw noSuchAlarm(id)
      const step = stepAlarm(lifeOf(alarm), input, 1)
      if (step.kind === 'refused') throw wrongState(id, step.why)
      const at = Date.now()
      const who = input === 'acknowledge' ? { acknowledgedAt: at, acknowledgedBy: by } : {}
      store.alarms.put({ ...withLife({ ...alarm, shelvedUntil }, step.life), ...who })
      store.alarms.event(id, at, DONE[input], by, note)
      store.records.decide(at, by, input, `alarm ${id}`, note)
    })
  } finally {
    store.close()
  }
  const end = shelvedUntil === null ? '' : ` until ${new Date(shelvedUntil).toISOString()}`
  printLine(`alarm ${id} ${DONE[input]} by ${by}${end}`)
}

const DONE = {
  acknowledge: 'acknowledged',
  shelve: 'shelved',
  unshelve: 'unshelved',
  reset: 'reset',
} as const

const wrongState = (id: number, why: string): FaultError =>
  new FaultError(
    [
      {
        code: 'alarm-state',
        place: { at: `alarm ${id}` },
        what: why,
        remedy: `\`tendq alarms show ${id}\` tells its state`,
      },
    ],
    EXIT.usage,
  )

/** Nothing is silent for ever. */
const LONGEST_SHELVING_DAYS = 30
const DAY_MS = 86_400_000

const shelve = (text: string, options: DecisionOptions & { readonly for: string }): void => {
  const reading = parseQuantity(options.for.replace(/^([\d.]+)\s*/, '$1 '), 'duration')
  if (reading.kind === 'refused') throw usageFault('--for', `${options.for}: ${reading.what}`, reading.remedy)
  if (reading.value <= 0 || reading.value > LONGEST_SHELVING_DAYS * DAY_MS)
    throw usageFault(
      '--for',
      `${options.for} is not within 0 and ${LONGEST_SHELVING_DAYS} days`,
      'say for example --for 8h',
    )
  decide(text, 'shelve', options, Date.now() + reading.value)
}
