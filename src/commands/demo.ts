import { relative } from 'node:path'
import { fileURLToPath } from 'node:url'
import type { Command } from 'commander'
import { EXIT } from '../fault.ts'
import { exitWith, printLine } from './print.ts'

export const addDemo = (program: Command): void => {
  program
    .command('demo')
    .summary('the whole job on made-up data, in about a minute')
    .description(
      'Plays two invented instruments to a daemon of its own: spectra are kept, one sample drifts, the letter arrives. Everything stays on this machine, in a fresh temporary folder.',
    )
    .addHelpText(
      'after',
      '\nExample:\n  tendq demo\n\nExit code 0 only if the expected alarm rang, its letter arrived, and nothing else rang.',
    )
    .action(showDemo)
}

const CLI = fileURLToPath(new URL('../cli.js', import.meta.url))

const showDemo = async (): Promise<void> => {
  const { play } = await import('../demo/play.ts')
  const stop = new AbortController()
  const onSignal = () => stop.abort()
  process.once('SIGINT', onSignal)
  process.once('SIGTERM', onSignal)
  const outcome = await play(CLI, printLine, stop.signal)
  process.off('SIGINT', onSignal)
  process.off('SIGTERM', onSignal)
  if (outcome.kind === 'stopped') {
    printLine('Stopped; nothing was left behind.')
    exitWith(EXIT.degraded)
    return
  }
  const { room, alarm, faults } = outcome
  const call = `node ${relative('', CLI)}`
  printLine(`The database lies in ${room.database}`)
  printLine(`The letters lie in   ${room.lettersFolder}`)
  printLine('')
  printLine('To try next:')
  printLine(`  ${call} history AGE-CL-1 --config ${room.configFolder}`)
  printLine(`  ${call} alarms show ${alarm ?? 1} --config ${room.configFolder}`)
  printLine(`  ${call} alarms acknowledge ${alarm ?? 1} --by me --note "seen" --config ${room.configFolder}`)
  printLine('')
  if (faults.length === 0) {
    printLine('As expected: one alarm rang, its letter arrived, and nothing else rang.')
    return
  }
  for (const fault of faults) process.stderr.write(`demo: ${fault}; the daemon's log is ${room.folder}/daemon.log\n`)
  exitWith(EXIT.degraded)
}
