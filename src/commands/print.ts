import { EXIT, type ExitCode, type Fault, FaultError, sayFault } from '../fault.ts'

/** Results go to stdout, a line at a time. */
export const printLine = (line: string): void => {
  process.stdout.write(`${line}\n`)
}

/** One JSON object a line, as `--json` promises. */
export const printJson = (value: unknown): void => printLine(JSON.stringify(value))

/** Errors go to stderr as `PLACE: what is wrong; what to do`. */
export const printFaults = (faults: readonly Fault[]): void => {
  for (const fault of faults) process.stderr.write(`${sayFault(fault)}\n`)
}

/** A mistake in how the command was called. */
export const usageFault = (option: string, what: string, remedy: string): FaultError =>
  new FaultError([{ code: 'usage', place: { at: option }, what, remedy }], EXIT.usage)

/** Ends the command with this exit code once everything is written. */
export const exitWith = (code: ExitCode): void => {
  process.exitCode = code
}
