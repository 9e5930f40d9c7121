import type { Command } from 'commander'
import { findConfigFolder, loadConfig } from '../config/index.ts'
import type { Config } from '../config/types.ts'
import { EXIT, FaultError } from '../fault.ts'
import { notesOf } from './checkNotes.ts'
import { describe } from './checkText.ts'
import { exitWith, printJson, printLine, usageFault } from './print.ts'

interface Options {
  readonly config?: string
  readonly json?: true
  readonly mailTest?: string
}

export const addCheck = (program: Command): void => {
  program
    .command('check')
    .summary('validate the whole configuration and say what it means')
    .description(
      'Validates the whole configuration, names every problem at its place, then says in words what would be watched, fitted, judged and mailed.',
    )
    .option('--config <folder>', 'configuration folder')
    .option('--json', 'one JSON object a line: each fault, or what the configuration means')
    .option('--mail-test <address>', 'send a test letter to this address')
    .addHelpText(
      'after',
      `
Example:
  tendq check
  tendq check --config /etc/tendq --mail-test keeper@lab.example

Exit codes: 0 all is right, 74 the test letter did not go out, 78 the configuration has faults.`,
    )
    .action(check)
}

const check = async (options: Options): Promise<void> => {
  if (options.mailTest !== undefined && !options.mailTest.includes('@'))
    throw usageFault('--mail-test', `"${options.mailTest}" is no mail address`, 'write one as in keeper@lab.example')
  const config = await valid(findConfigFolder(options.config), options.json === true)
  const notes = notesOf(config)
  if (options.json) printJson({ ...described(config), notes })
  else for (const line of describe(config, notes)) printLine(line)
  if (options.mailTest !== undefined) await testMail(config, options.mailTest, options.json === true)
}

/** The configuration with its rules proven to compile, or a FaultError that names everything. */
const valid = async (folder: string, json: boolean): Promise<Config> => {
  const { compileRule } = await import('../rules/index.ts')
  const loaded = loadConfig(folder, (rule) => {
    const compilation = compileRule(rule)
    return compilation.kind === 'refused' ? compilation.faults : []
  })
  if (loaded.kind === 'loaded') return loaded.config
  if (json)
    for (const { code, place, what, remedy } of loaded.faults) printJson({ fault: code, ...place, what, remedy })
  throw new FaultError(loaded.faults, EXIT.config)
}

const testMail = async (config: Config, address: string, json: boolean): Promise<void> => {
  const { sendTestLetter } = await import('../mail/index.ts')
  const delivery = await sendTestLetter(config, address)
  if (json) printJson({ mail_test: address, ...delivery })
  if (delivery.kind === 'sent') {
    if (!json) printLine(`\nThe mail server took a test letter to ${address}: see that it arrives.`)
    return
  }
  exitWith(EXIT.io)
  const { host, port } = config.mail ?? { host: 'the mail server', port: 0 }
  const what = `the test letter to ${address} was ${delivery.kind === 'later' ? 'not taken for now' : 'refused'} (${delivery.why})`
  const remedy = 'mend `mail:` in tendq.yaml, or ask whoever keeps the mail server'
  throw new FaultError([{ code: 'mail-test', place: { at: `${host}:${port}` }, what, remedy }], EXIT.io)
}

/** For scripts: names only; the YAML itself is the place for the rest. */
const described = (config: Config) => ({
  configuration: config.folder,
  sha256: config.sha256,
  room: config.room,
  data: config.dataFolder,
  timezone: config.timeZone,
  instruments: config.instruments.map(({ name, dropFolder, files }) => ({ instrument: name, drop: dropFolder, files })),
  species: config.species.map(({ name }) => name),
  studies: config.studies.map(({ name, kind, species, samples, tell }) => ({
    study: name,
    kind,
    species,
    samples: samples.map((sample) => sample.name),
    tell,
  })),
  rules: config.rules.map(({ name, of, priority, persist }) => ({ rule: name, of, priority, persist })),
})
