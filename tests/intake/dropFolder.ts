import { mkdir, mkdtemp, rm } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { startIntake } from '../../src/intake/index.ts'
import type {
  Arrival,
  DropFolder,
  FileMark,
  Intake,
  IntakeEvent,
  IntakeOptions,
  IntakePorts,
} from '../../src/intake/types.ts'

/** A drop folder of its own, and ports that remember what they were told. Removed at the end of the test. */
export interface Room {
  readonly folder: string
  readonly arrivals: Arrival[]
  readonly events: IntakeEvent[]
  /** Files whose content was asked about, in order. */
  readonly checked: string[]
  readonly ports: IntakePorts
  readonly path: (file: string) => string
  start(options?: Partial<IntakeOptions>, instrument?: Partial<DropFolder>): Intake
  readonly files: () => string[]
  readonly texts: () => string[]
  end(): Promise<void>
}

/** A text file is whole, here, when it ends in END. */
const endsInEnd = (bytes: Uint8Array): boolean => /END\n?$/.test(Buffer.from(bytes).toString())

export const openRoom = async (): Promise<Room> => {
  const home = await mkdtemp(join(tmpdir(), 'intake-'))
  const folder = join(home, 'drop')
  await mkdir(folder)
  const arrivals: Arrival[] = []
  const events: IntakeEvent[] = []
  const checked: string[] = []
  const seen = new Map<string, FileMark>()
  const running: Intake[] = []
  const ports: IntakePorts = {
    seen: (instrument, file) => seen.get(`${instrument} ${file}`) ?? null,
    claim: (arrival) => {
      arrivals.push(arrival)
      seen.set(`${arrival.instrument} ${arrival.file}`, arrival.mark)
    },
    readsCompletely: async (_instrument, file, bytes) => {
      checked.push(file)
      return endsInEnd(bytes)
    },
    now: Date.now,
    tell: (event) => void events.push(event),
  }
  return {
    folder,
    arrivals,
    events,
    checked,
    ports,
    path: (file) => join(folder, file),
    start: (options = {}, instrument = {}) => {
      const uv1 = { name: 'uv1', dropFolder: folder, files: '**/*.{csv,txt}', ...instrument }
      const quick = { settleMs: 100, giveUpMs: 60_000, checkEveryMs: 100, scanEveryMs: 60_000 }
      const intake = startIntake([uv1], ports, { ...quick, ...options })
      running.push(intake)
      return intake
    },
    files: () => arrivals.map(({ file }) => file),
    texts: () => arrivals.map(({ bytes }) => Buffer.from(bytes).toString()),
    end: async () => {
      for (const intake of running) await intake.stop()
      await rm(home, { recursive: true, force: true })
    },
  }
}

/** Resolves as soon as the condition holds; fails after so many milliseconds. */
export const until = async (condition: () => boolean, timeoutMs = 8_000): Promise<void> => {
  const deadline = performance.now() + timeoutMs
  while (!condition()) {
    if (performance.now() > deadline) throw new Error(`not within ${timeoutMs} ms: ${condition}`)
    await pause(10)
  }
}

export const pause = (ms: number): Promise<void> => new Promise((resolve) => setTimeout(resolve, ms))
