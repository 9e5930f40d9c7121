import { Command, CommanderError } from 'commander'
import { ENGINE } from '../analysis/types.ts'
import { EXIT, FaultError } from '../fault.ts'
import { exitWith, printFaults } from './print.ts'

type AddCommand = (program: Command) => void

/** Each command lives in a file of its own and is loaded only when asked for: start-up stays short. */
const COMMANDS: Readonly<Record<string, () => Promise<AddCommand>>> = {
  run: async () => (await import('./run.ts')).addRun,
  init: async () => (await import('./init.ts')).addInit,
  check: async () => (await import('./check.ts')).addCheck,
  inspect: async () => (await import('./inspect.ts')).addInspect,
  fit: async () => (await import('./fit.ts')).addFit,
  mixture: async () => (await import('./mixture.ts')).addMixture,
  levels: async () => (await import('./levels.ts')).addLevels,
  history: async () => (await import('./history.ts')).addHistory,
  alarms: async () => (await import('./alarms.ts')).addAlarms,
  exclude: async () => (await import('./exclude.ts')).addExclude,
  restore: async () => (await import('./exclude.ts')).addRestore,
  reassign: async () => (await import('./reassign.ts')).addReassign,
  'approve-reference': async () => (await import('./approveReference.ts')).addApproveReference,
  'out-of-service': async () => (await import('./outOfService.ts')).addOutOfService,
  'return-to-service': async () => (await import('./returnToService.ts')).addReturnToService,
  reanalyse: async () => (await import('./reanalyse.ts')).addReanalyse,
  rehearse: async () => (await import('./rehearse.ts')).addRehearse,
  status: async () => (await import('./status.ts')).addStatus,
  demo: async () => (await import('./demo.ts')).addDemo,
}

/** Runs one command; every failure ends as a sentence on stderr and an exit code of the contract. */
export const runCommandLine = async (argv: readonly string[]): Promise<void> => {
  // `tendq history X | head` closes the pipe when it has seen enough: no fault of anybody
  process.stdout.on('error', (error: NodeJS.ErrnoException) => process.exit(error.code === 'EPIPE' ? EXIT.ok : EXIT.io))
  const program = new Command('tendq')
    .description('Takes in exported spectra, fits the d-d bands, keeps the history, raises alarms.')
    .version(ENGINE)
    .exitOverride()
    .showHelpAfterError('(tendq --help lists the commands)')
  const asked = argv[2]
  const names = asked !== undefined && Object.hasOwn(COMMANDS, asked) ? [asked] : Object.keys(COMMANDS)
  try {
    for (const name of names) (await COMMANDS[name]!())(program)
    for (const command of program.commands) command.exitOverride()
    await program.parseAsync([...argv])
  } catch (error) {
    exitWith(report(error))
  }
}

const report = (error: unknown) => {
  if (error instanceof FaultError) {
    printFaults(error.faults)
    return error.exit
  }
  // commander has already said what was wrong with the call
  if (error instanceof CommanderError) return error.exitCode === 0 ? EXIT.ok : EXIT.usage
  process.stderr.write(
    `tendq: ${error instanceof Error ? (error.stack ?? error.message) : String(error)}; this is a fault of the program, please report it\n`,
  )
  return EXIT.internal
}
