import { createHash } from 'node:crypto'
import pino from 'pino'
import { onTestFinished } from 'vitest'
import { processPending, type Stations } from '../../src/daemon/pipeline.ts'
import { loadRoom, type RoomInForce } from '../../src/daemon/room.ts'
import { fit, read } from '../../src/daemon/worker.ts'
import { openStore, type Store, storeOn } from '../../src/store/index.ts'
import { noiseFrom, spectrumText, type TestRoom, testRoom } from '../daemon/house.ts'

const HOUR = 3_600_000
export const BEGAN = Date.UTC(2026, 2, 2, 9)

/** Time of the n-th measurement, six hours apart. */
export const timeOf = (n: number): number => BEGAN + n * 6 * HOUR

/** A room whose daemon works in this process, with a clock that stands at the time of each measurement. */
export interface Bench {
  readonly room: TestRoom
  readonly store: Store
  readonly inForce: RoomInForce
  /** One spectrum, its bands moved by so many cm⁻¹, taken in and judged. */
  measure(sample: string, at: number, movedPerCm?: number, seed?: number): Promise<void>
  close(): void
}

export const bench = (files: Readonly<Record<string, string>> = {}): Bench => {
  const room = testRoom()
  for (const [name, text] of Object.entries(files)) room.write(name, text)
  const loaded = loadRoom(room.config)
  if (loaded.kind === 'refused') throw new Error(JSON.stringify(loaded.faults))
  const db = openStore(room.data)
  onTestFinished(() => void db.close())
  const store = storeOn(db)
  let now = BEGAN
  const stations: Stations = {
    store,
    pool: { read: async (job) => read(job), fit: async (job) => fit(job), stop: async () => {} },
    log: pino({ level: 'silent' }),
    now: () => now,
    room: () => loaded.room,
    onKept: () => {},
  }
  let count = 0
  return {
    room,
    store,
    inForce: loaded.room,
    measure: async (sample, at, movedPerCm = 0, seed = ++count) => {
      const bands = [
        [19531 + movedPerCm, 3500, 0.45],
        [26667 + movedPerCm, 3900, 0.47],
      ] as const
      const text = spectrumText({ bands, seed })
      const bytes = new TextEncoder().encode(`${text}`)
      const stamp = new Date(at).toISOString().slice(0, 16).replace(/[-:]/g, '')
      now = at
      store.arrivals.claim(
        {
          instrument: 'uv1',
          file: `${sample}_${stamp}.csv`,
          bytes,
          sha256: createHash('sha256').update(bytes).digest('hex'),
          mark: { size: bytes.length, mtimeMs: at, ctimeMs: at, inode: 7 },
          mtimeMs: at,
        },
        at,
      )
      await processPending(stations)
    },
    close: () => void db.close(),
  }
}

/** Reproducible scatter of standard deviation 1. */
export const scatter = (seed: number): (() => number) => noiseFrom(seed)
