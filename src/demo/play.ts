import { type ChildProcess, spawn } from 'node:child_process'
import { mkdtempSync, openSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { setTimeout as pause } from 'node:timers/promises'
import { playInstrument } from './instruments.ts'
import { alarmLine, HEADING, spectrumLine } from './lines.ts'
import { type AlarmRow, type Observer, observe } from './observe.ts'
import { DRIFTING } from './plan.ts'
import { openReceiver, plainTextOf, saveLetter } from './receiver.ts'
import { type DemoRoom, furnish, INSTRUMENTS, RULE_THAT_RINGS } from './room.ts'

/** What the demonstration came to. */
export type Outcome = Result | { readonly kind: 'stopped' }

interface Result extends Finding {
  readonly kind: 'played'
  readonly room: DemoRoom
}

interface Finding {
  /** Sentences on what did not go as it should; empty when all did. */
  readonly faults: readonly string[]
  readonly alarm: number | null
}

/** The demonstration must be over by then, whatever happens. */
const LONGEST_MS = 70_000
const LOOK_MS = 150
/** After the last spectrum was kept, how long a further letter or alarm may still come. */
const QUIET_MS = 2_000
const SEED = 20_260_302

/**
 * Furnishes a room, starts the daemon in a process of its own, plays the instruments, and prints what comes of it.
 * When it is told to stop nothing is left behind.
 */
export const play = async (cli: string, print: (line: string) => void, stop: AbortSignal): Promise<Outcome> => {
  const folder = mkdtempSync(join(tmpdir(), 'tendq-demo-'))
  const letters: string[] = []
  const receiver = await openReceiver((message) => void letters.push(message))
  const room = furnish(folder, receiver.port)
  const log = join(folder, 'daemon.log')
  const daemon = startDaemon(cli, room, log)
  const over = AbortSignal.any([stop, AbortSignal.timeout(LONGEST_MS)])
  try {
    print(`A room with two instruments, made up, in ${folder}`)
    print('')
    const finding = await follow({ room, daemon, log, letters, print, over })
    return stop.aborted ? { kind: 'stopped' } : { kind: 'played', room, ...finding }
  } finally {
    await stopDaemon(daemon)
    await receiver.close()
    if (stop.aborted) rmSync(folder, { recursive: true, force: true })
  }
}

const startDaemon = (cli: string, { configFolder }: DemoRoom, log: string): ChildProcess => {
  const out = openSync(log, 'a')
  return spawn(process.execPath, [cli, 'run', '--config', configFolder], {
    stdio: ['ignore', out, out],
    env: { ...process.env, TENDQ_SETTLE_MS: '500' },
  })
}

const isRunning = (daemon: ChildProcess): boolean => daemon.exitCode === null && daemon.signalCode === null

const stopDaemon = async (daemon: ChildProcess): Promise<void> => {
  if (!isRunning(daemon)) return
  const gone = new Promise<void>((resolve) => daemon.once('exit', () => resolve()))
  daemon.kill('SIGTERM')
  const late = setTimeout(() => daemon.kill('SIGKILL'), 8_000)
  await gone
  clearTimeout(late)
}

interface Scene {
  readonly room: DemoRoom
  readonly daemon: ChildProcess
  readonly log: string
  /** Messages as they arrived, filled by the receiver. */
  readonly letters: readonly string[]
  readonly print: (line: string) => void
  readonly over: AbortSignal
}

const EXPECTED = INSTRUMENTS.reduce((sum, { measurements }) => sum + measurements.length, 0)

const follow = async (scene: Scene): Promise<Finding> => {
  const { room, over } = scene
  const ended = new AbortController()
  const playing = AbortSignal.any([over, ended.signal])
  const instruments = INSTRUMENTS.map((instrument, i) =>
    playInstrument(instrument, room.dropFolderOf(instrument.name), SEED + 1000 * i, playing),
  )
  // a fault of the daemon or the time ends the watching; the instruments are stopped then, and are not waited for
  const played = Promise.allSettled(instruments)
  try {
    return await watch(scene)
  } finally {
    ended.abort()
    await played
  }
}

const watch = async ({ room, daemon, log, letters, print, over }: Scene): Promise<Finding> => {
  let observer: Observer | null = null
  let kept = 0
  let quietSince: number | null = null
  const told = { alarms: new Set<number>(), letters: 0 }
  try {
    for (;;) {
      observer ??= observe(room.database)
      const spectra = observer?.newSpectra() ?? []
      if (kept === 0 && spectra.length > 0) print(HEADING)
      for (const spectrum of spectra) print(spectrumLine(spectrum))
      kept += spectra.length
      for (const alarm of (observer?.alarms() ?? []).filter(({ id }) => !told.alarms.has(id))) {
        told.alarms.add(alarm.id)
        print(`\n${alarmLine(alarm)}\n`)
      }
      for (const message of letters.slice(told.letters)) {
        told.letters += 1
        printLetter(saveLetter(room.lettersFolder, told.letters, message), message, print)
      }
      if (kept >= EXPECTED && spectra.length === 0 && told.letters > 0) quietSince ??= performance.now()
      const isQuiet = quietSince !== null && performance.now() - quietSince > QUIET_MS
      const late = over.aborted
      if (isQuiet || late || !isRunning(daemon)) {
        const faults = faultsOf(observer, kept, letters)
        const why = isRunning(daemon) ? [] : [`the daemon ended early: ${lastLines(log)}`]
        return { faults: [...why, ...faults], alarm: observer?.alarms()[0]?.id ?? null }
      }
      await pause(LOOK_MS)
    }
  } finally {
    observer?.close()
  }
}

const printLetter = (path: string, message: string, print: (line: string) => void): void => {
  print(`\nA letter arrived, and lies in ${path}. As it reads:\n`)
  for (const line of plainTextOf(message).trimEnd().split(/\r?\n/)) print(`  | ${line}`.trimEnd())
  print('')
}

const isExpected = ({ rule, subject }: AlarmRow): boolean => rule === RULE_THAT_RINGS && subject === DRIFTING

/** The one alarm rang and its letter came; no other did; nothing was set aside. */
const faultsOf = (observer: Observer | null, kept: number, letters: readonly string[]): readonly string[] => {
  const alarms = observer?.alarms() ?? []
  return [
    ...(kept === EXPECTED ? [] : [`${kept} of ${EXPECTED} spectra were kept`]),
    ...(alarms.some(isExpected) ? [] : [`the rule ${RULE_THAT_RINGS} did not ring for ${DRIFTING}`]),
    ...alarms
      .filter((alarm) => !isExpected(alarm))
      .map(({ rule, subject }) => `${rule} rang for ${subject}, and should not have`),
    ...(letters.length === 1 ? [] : [`${letters.length} letters came, and it should have been one`]),
    ...letters
      .filter((message) => !plainTextOf(message).replace(/\s+/g, ' ').includes(`sample ${DRIFTING}`))
      .map(() => `a letter came that is not about ${DRIFTING}`),
    ...(observer?.setAside() ?? []).map(({ file, reason }) => `${file} was set aside: ${reason}`),
  ]
}

const lastLines = (log: string): string => readFileSync(log, 'utf8').trimEnd().split('\n').slice(-3).join(' / ')
