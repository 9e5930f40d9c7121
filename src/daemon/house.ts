import type { Logger } from 'pino'
import type { Instrument } from '../config/types.ts'
import { EXIT, FaultError, sayFault } from '../fault.ts'
import { startIntake } from '../intake/index.ts'
import type { DropFolder, Intake, IntakeEvent, IntakeOptions, IntakePorts } from '../intake/types.ts'
import { holdDataFolder, openStore, storeOn } from '../store/index.ts'
import { noteDaily, writeDaily } from './daily.ts'
import { escalate } from './escalate.ts'
import { singleFlight } from './flight.ts'
import { followDecisions } from './follow.ts'
import type { DaemonNote } from './health.ts'
import { judgeOverdueSamples } from './overdue.ts'
import { processPending, type Stations } from './pipeline.ts'
import { startPool } from './pool.ts'
import { sendDue } from './post.ts'
import { loadRoom, type RoomInForce } from './room.ts'
import { followClock } from './service.ts'
import { followCommonChanges } from './suppress.ts'

export type Stop = () => void | Promise<void>

/** After a storage fault (disk full, folder gone) everything waits this long before it is tried again. */
const RETRY_MS = 10_000

/** Everything that runs for as long as the daemon does, wired together. Throws FaultError where it cannot start. */
export const openHouse = (configFolder: string, log: Logger) => {
  let inForce = mustLoad(configFolder)
  const { dataFolder } = inForce.config
  const now = () => Date.now()
  const lock = holdDataFolder(dataFolder, new Date(now()))
  const store = storeOn(openStore(dataFolder))
  store.records.configurationInForce(inForce.config, now())
  const pool = startPool()
  const troubles = new Map<string, string>()
  let intake: Intake | null = null

  const trouble = (subject: string, sentence: string | null): void => {
    if (sentence === null) troubles.delete(subject)
    else troubles.set(subject, sentence)
  }

  /** Runs a job; a failure is logged and shown by `status`, and is over with the next success. */
  const minding = async (subject: string, what: string, job: () => void | Promise<void>): Promise<boolean> => {
    try {
      await job()
      trouble(subject, null)
      return true
    } catch (error) {
      log.error({ err: error }, what)
      trouble(subject, `${what}: ${error instanceof Error ? error.message : String(error)}`)
      return false
    }
  }

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

  noteDaily(stations)

  const working = singleFlight(async () => {
    const kept = await minding('storage', 'outcomes could not be kept, they will be tried again', async () => {
      await processPending(stations)
      if ((await followDecisions(stations)) > 0) sending.kick()
    })
    if (!kept) setTimeout(() => working.kick(), RETRY_MS).unref()
  })

  const sending = singleFlight(async () => {
    const { mail } = inForce.config
    if (mail !== null) await minding('mail', 'letters could not be sent', () => sendDue(mail, stations))
  })

  const judgeTimes = (): Promise<boolean> =>
    minding('overdue', 'what the clock decides could not be judged', () => {
      judgeOverdueSamples(stations)
      followClock(stations)
      followCommonChanges(stations)
      escalate(stations)
      writeDaily(stations)
    })

  let heard = 0
  /** People decide in processes of their own: what they said is followed at once, not with the next tick. */
  const hearDecisions = (): Promise<boolean> =>
    minding('decisions', 'what people decided could not be read', async () => {
      const newest = store.decisions.newest()
      if (newest === heard) return
      heard = newest
      working.kick()
      if (await judgeTimes()) sending.kick()
    })

  const note = (): void => {
    const waiting = intake?.waiting() ?? []
    const body: DaemonNote = {
      instruments: (intake?.state() ?? []).map(({ instrument, reachable, why, lastScanAt }) => ({
        instrument,
        reachable,
        why,
        last_scan_at: lastScanAt === null ? null : new Date(lastScanAt).toISOString(),
        waiting: waiting.filter((file) => file.instrument === instrument).map(({ file }) => file),
      })),
      troubles: [...troubles.values(), ...(intake?.troubles() ?? []).map(({ fault }) => sayFault(fault))],
    }
    try {
      store.records.say('daemon', body, now())
    } catch (error) {
      log.error({ err: error }, 'the daemon could not note its state')
    }
  }

  const ports: IntakePorts = {
    seen: store.arrivals.seen,
    claim: (arrival) => {
      const id = store.arrivals.claim(arrival, now())
      log.info({ arrival: id, instrument: arrival.instrument, file: arrival.file }, 'file taken in')
      working.kick()
    },
    readsCompletely: async (instrument, file, bytes) => {
      const hints = inForce.config.instruments.find(({ name }) => name === instrument)?.reading ?? {}
      return (await pool.read({ bytes, file, hints })).kind === 'read'
    },
    now,
    tell: (event) => tellLog(log, event),
  }

  return {
    log,
    room: (): RoomInForce => inForce,

    /** Takes files in by the configuration in force, in place of the intake that ran before. */
    takeIn: async (options: Partial<IntakeOptions>): Promise<Intake> => {
      await intake?.stop()
      const started = startIntake(inForce.config.instruments.map(dropFolderOf), ports, {
        ...optionsFromEnvironment(),
        ...options,
      })
      intake = started
      return started
    },

    /** Takes a changed configuration whole, or keeps the old one and says so. True when a new one is in force. */
    reload: (why: string): boolean => {
      const fresh = loadRoom(configFolder)
      if (fresh.kind === 'refused') {
        log.error({ faults: fresh.faults.map(sayFault) }, 'the changed configuration is refused, the old one stays')
        trouble(
          'configuration',
          `the changed configuration is refused, the old one stays in force: ${sayFault(fresh.faults[0])}`,
        )
        note()
        return false
      }
      trouble('configuration', null)
      const changed = fresh.room.config.sha256 !== inForce.config.sha256
      if (changed) {
        trouble('restart', needsRestart(fresh.room, inForce))
        inForce = fresh.room
        store.records.configurationInForce(inForce.config, now())
        noteDaily(stations)
        log.info({ why, sha256: inForce.config.sha256 }, 'a new configuration is in force')
      }
      note()
      return changed
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
    hearDecisions,

    close: async (): Promise<void> => {
      await intake?.stop()
      await working.idle()
      await sending.idle()
      note()
      await pool.stop()
      store.close()
      lock.release()
    },
  }
}

const mustLoad = (configFolder: string): RoomInForce => {
  const loaded = loadRoom(configFolder)
  if (loaded.kind === 'refused') throw new FaultError(loaded.faults, EXIT.config)
  return loaded.room
}

const needsRestart = ({ config: fresh }: RoomInForce, { config: old }: RoomInForce): string | null =>
  fresh.dataFolder !== old.dataFolder || fresh.web?.host !== old.web?.host || fresh.web?.port !== old.web?.port
    ? 'the data folder or the listening address changed in the configuration: restart the daemon'
    : null

/** `auto` leaves the choice between events and polling to intake. */
const dropFolderOf = ({ name, dropFolder, files, watch }: Instrument): DropFolder => ({
  name,
  dropFolder,
  files,
  ...(watch === 'auto' ? {} : { watch }),
})

const tellLog = (log: Logger, event: IntakeEvent): void => {
  if ('fault' in event) log.warn({ instrument: event.instrument, kind: event.kind }, sayFault(event.fault))
  else log.info(event, 'intake: in order again')
}

/** Settling can be hurried where files are known to be written at once (tests, the demo). */
const optionsFromEnvironment = (): Partial<IntakeOptions> => ({
  ...patience('settleMs', process.env.TENDQ_SETTLE_MS),
  ...patience('giveUpMs', process.env.TENDQ_GIVE_UP_MS),
})

const patience = (name: 'settleMs' | 'giveUpMs', text: string | undefined): Partial<IntakeOptions> => {
  const ms = Number(text)
  return Number.isFinite(ms) && ms > 0 ? { [name]: ms } : {}
}
