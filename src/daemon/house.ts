import type { Logger } from 'pino'
import { EXIT, FaultError, sayFault } from '../fault.ts'
import type { IntakeOptions, IntakePorts, IntakeState } from '../intake/types.ts'
import { holdDataFolder, openStore, storeOn } from '../store/index.ts'
import type { DaemonNote } from './health.ts'
import { judgeOverdue } from './overdue.ts'
import { processPending, type Stations } from './pipeline.ts'
import { startPool } from './pool.ts'
import { sendDue } from './post.ts'
import { loadRoom, type RoomInForce } from './room.ts'

export type Stop = () => void | Promise<void>

/** After a storage fault (disk full, folder gone) everything waits this long before it is tried again. */
const RETRY_MS = 10_000

/** Everything that runs for as long as the daemon does, wired together. Throws FaultError where it cannot start. */
export const openHouse = (configFolder: string, log: Logger) => {
  const loaded = loadRoom(configFolder)
  if (loaded.kind === 'refused') throw new FaultError(loaded.faults, EXIT.config)
  let inForce: RoomInForce = loaded.room
  const { dataFolder } = inForce.config
  const now = () => Date.now()
  const lock = holdDataFolder(dataFolder, new Date(now()))
  const store = storeOn(openStore(dataFolder))
  store.records.configurationInForce(inForce.config, now())
  const pool = startPool()
  const troubles = new Map<string, string>()
  let intakeState: () => readonly IntakeState[] = () => []
  let intakeWaiting: () => readonly { instrument: string; file: string }[] = () => []

  const stations: Stations = {
    store,
    pool,
    log,
    now,
    room: () => inForce,
    onKept: ({ spectrum, sample, arrival }) => {
      log.info({ spectrum, sample, arrival }, 'spectrum kept')
      sending.kick()
    },
  }

  const trouble = (subject: string, sentence: string | null): void => {
    if (sentence === null) troubles.delete(subject)
    else troubles.set(subject, sentence)
  }

  const working = singleFlight(async () => {
    try {
      await processPending(stations)
      trouble('storage', null)
    } catch (error) {
      log.error({ err: error }, 'outcomes could not be kept; they will be tried again')
      trouble('storage', `outcomes could not be kept: ${error instanceof Error ? error.message : String(error)}`)
      setTimeout(() => working.kick(), RETRY_MS).unref()
    }
  })

  const sending = singleFlight(async () => {
    const { mail } = inForce.config
    if (mail === null) return
    try {
      await sendDue(mail, { store, log, now })
      trouble('mail', null)
    } catch (error) {
      log.error({ err: error }, 'letters could not be sent')
      trouble('mail', `letters could not be sent: ${error instanceof Error ? error.message : String(error)}`)
    }
  })

  const note = (): void => {
    const waiting = intakeWaiting()
    const body: DaemonNote = {
      instruments: intakeState().map(({ instrument, reachable, lastScanAt }) => ({
        instrument,
        reachable,
        last_scan_at: lastScanAt === null ? null : new Date(lastScanAt).toISOString(),
        waiting: waiting.filter((file) => file.instrument === instrument).map(({ file }) => file),
      })),
      troubles: [...troubles.values()],
    }
    try {
      store.records.say('daemon', body, now())
    } catch (error) {
      log.error({ err: error }, 'the daemon could not note its state')
    }
  }

  const judgeTimes = async (): Promise<void> => {
    try {
      judgeOverdue(stations)
    } catch (error) {
      log.error({ err: error }, 'overdue samples could not be judged')
    }
  }

  return {
    log,
    room: () => inForce,
    intakeOptions: optionsFromEnvironment(),
    watchIntake: (state: typeof intakeState): void => {
      intakeState = state
    },
    noteIntakeWaiting: (waiting: typeof intakeWaiting): void => {
      intakeWaiting = waiting
    },

    intakePorts: (): IntakePorts => ({
      seen: store.arrivals.seen,
      claim: (arrival) => {
        const id = store.arrivals.claim(arrival, now())
        log.info({ arrival: id, instrument: arrival.instrument, file: arrival.file }, 'file taken in')
        working.kick()
      },
      readsCompletely: async (instrument, file, bytes) => {
        const hints = inForce.config.instruments.find(({ name }) => name === instrument)?.reading ?? {}
        const reading = await pool.read({ bytes, file, hints })
        return reading.kind === 'read'
      },
      now,
      tell: (event) => {
        log.warn(event, 'intake')
        trouble(
          `intake ${event.instrument} ${event.file ?? ''} ${event.kind}`,
          event.mended === true ? null : event.what,
        )
      },
    }),

    /** Takes a changed configuration whole, or keeps the old one and says so. True when a new one is in force. */
    reload: (why: string): boolean => {
      const fresh = loadRoom(configFolder)
      if (fresh.kind === 'refused') {
        const first = sayFault(fresh.faults[0])
        log.error({ faults: fresh.faults.map(sayFault) }, 'the changed configuration is refused, the old one stays')
        trouble('configuration', `the changed configuration is refused, the old one stays in force: ${first}`)
        note()
        return false
      }
      trouble('configuration', null)
      if (fresh.room.config.sha256 === inForce.config.sha256) {
        note()
        return false
      }
      const { dataFolder: folder, web } = fresh.room.config
      const restart =
        folder !== dataFolder || web?.host !== inForce.config.web?.host || web?.port !== inForce.config.web?.port
      trouble('restart', restart ? 'the data folder or the listening address changed: restart the daemon' : null)
      inForce = fresh.room
      store.records.configurationInForce(inForce.config, now())
      log.info({ why, sha256: inForce.config.sha256 }, 'a new configuration is in force')
      note()
      return true
    },

    tick: (): void => {
      working.kick()
      void judgeTimes()
      sending.kick()
      note()
    },
    work: working.run,
    sendLetters: sending.run,
    judgeTimes,
    note,

    close: async (): Promise<void> => {
      await working.idle()
      await sending.idle()
      note()
      await pool.stop()
      store.close()
      lock.release()
    },
  }
}

export type House = ReturnType<typeof openHouse>

/** One run at a time; a kick during a run makes one more follow. */
const singleFlight = (job: () => Promise<void>) => {
  let running: Promise<void> | null = null
  let again = false
  const run = (): Promise<void> => {
    if (running !== null) {
      again = true
      return running
    }
    running = (async () => {
      do {
        again = false
        await job()
      } while (again)
      running = null
    })()
    return running
  }
  return { run, kick: (): void => void run(), idle: (): Promise<void> => running ?? Promise.resolve() }
}

/** Settling can be hurried where files are known to be written at once (tests, the demo). */
const optionsFromEnvironment = (): Partial<IntakeOptions> => {
  const settleMs = Number(process.env.TENDQ_SETTLE_MS)
  return Number.isFinite(settleMs) && settleMs > 0 ? { settleMs } : {}
}
