import { userInfo } from 'node:os'
import type { Command } from 'commander'
import { stepAlarm } from '../alarms/index.ts'
import { roomOf } from '../daemon/room.ts'
import { EXIT, FaultError } from '../fault.ts'
import { openStoreBeside, openStoreReadOnly, storeOn } from '../store/index.ts'
import { printJson, printLine, usageFault } from './print.ts'
import { printable } from './printable.ts'

interface ListOptions {
  readonly json?: true
  readonly all?: true
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
    .action((id: string, _: unknown, command: Command) => showAlarm(id, command.optsWithGlobals()))
  alarms
    .command('acknowledge')
    .description('Says that a person has seen the alarm. It stays until its cause is gone.')
    .argument('<id>')
    .requiredOption('--by <who>', 'your name')
    .option('--note <text>', 'what you found or will do', '')
    .option('--config <folder>', 'configuration folder')
    .action((id: string, _: unknown, command: Command) =>
      acknowledge(id, command.optsWithGlobals<{ by: string; note: string; config?: string }>()),
    )
  for (const command of alarms.commands) command.exitOverride()
}

const listAlarms = (options: ListOptions): void => {
  const db = openStoreReadOnly(roomOf(options.config).config.dataFolder)
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
  const db = openStoreReadOnly(roomOf(options.config).config.dataFolder)
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

const acknowledge = (text: string, { by, note, config }: { by: string; note: string; config?: string }): void => {
  const id = idOf(text)
  if (by.trim() === '')
    throw usageFault('--by', 'an acknowledgement needs a name', `say for example --by ${userInfo().username}`)
  const store = storeOn(openStoreBeside(roomOf(config).config.dataFolder))
  try {
    store.atomically(() => {
      const alarm = store.alarms.get(id)
      if (alarm === null) throw noSuchAlarm(id)
      const step = stepAlarm(
        { state: alarm.state, active: alarm.active, consecutive: 0, latch: alarm.latch },
        'acknowledge',
        1,
      )
      if (step.kind === 'refused')
        throw new FaultError(
          [
            {
              code: 'alarm-state',
              place: { at: `alarm ${id}` },
              what: step.why,
              remedy: `\`tendq alarms show ${id}\` tells its state`,
            },
          ],
          EXIT.usage,
        )
      const at = Date.now()
      store.alarms.put({
        ...alarm,
        state: step.life.state,
        active: step.life.active,
        acknowledgedAt: at,
        acknowledgedBy: by,
      })
      store.alarms.event(id, at, 'acknowledged', by, note)
      store.records.decide(at, by, 'acknowledge', `alarm ${id}`, note)
    })
    printLine(`alarm ${id} acknowledged by ${by}`)
  } finally {
    store.close()
  }
}
