/** Where something is wrong: a file, or a name for what was given (an option, an address). */
export interface Place {
  readonly at: string
  readonly line?: number
  readonly column?: number
}

/** One thing that is wrong, said so that the reader can mend it. */
export interface Fault {
  /** Stable word for scripts and tests, such as `axis-contradiction`. */
  readonly code: string
  readonly place: Place
  readonly what: string
  readonly remedy: string
}

/** BSD sysexits, as the contract lists them. */
export const EXIT = {
  ok: 0,
  degraded: 1,
  usage: 64,
  unreadable: 65,
  noInput: 66,
  internal: 70,
  io: 74,
  tryAgain: 75,
  config: 78,
} as const

export type ExitCode = (typeof EXIT)[keyof typeof EXIT]

export const sayPlace = ({ at, line, column }: Place): string =>
  [at, line, line === undefined ? undefined : column].filter((part) => part !== undefined).join(':')

/** `PLACE: what is wrong; what to do` */
export const sayFault = (fault: Fault): string => `${sayPlace(fault.place)}: ${fault.what}; ${fault.remedy}`

/** Carries faults to the edge of the program, where they are printed and become an exit code. */
export class FaultError extends Error {
  readonly faults: readonly Fault[]
  readonly exit: ExitCode
  constructor(faults: readonly Fault[], exit: ExitCode) {
    super(faults.map(sayFault).join('\n'))
    this.name = 'FaultError'
    this.faults = faults
    this.exit = exit
  }
}
