import { setTimeout as wait } from 'node:timers/promises'
import { watch } from 'chokidar'
import { startWeb } from '../web/index.ts'
import { openHouse, type Stop } from './house.ts'
import { startLog } from './log.ts'

/** How often the daemon looks up by itself: letters due, overdue samples, what it notes of itself. */
const TICK_MS = 10_000

/** How soon a person's decision is followed. */
const HEAR_MS = 1_000

/** Editors save in several steps; a configuration is read when the folder has been quiet this long. */
const QUIET_MS = 500

/** Runs until SIGTERM or SIGINT. Throws FaultError when it cannot start. */
export const runDaemon = async (configFolder: string): Promise<void> => {
  const house = openHouse(configFolder, startLog())
  const stops: Stop[] = []
  const asked = signalled()
  try {
    // the first scan tells what waits and which folders are there, before the daemon says that it is up
    await (await house.takeIn({})).scanNow()
    const reload = async (why: string): Promise<void> => {
      if (house.reload(why)) await house.takeIn({})
    }
    stops.push(await watchConfiguration(configFolder, () => void reload('a file of it was saved')))
    const onHangUp = () => void reload('SIGHUP')
    process.on('SIGHUP', onHangUp)
    stops.push(() => void process.off('SIGHUP', onHangUp))
    const { web } = house.room().config
    if (web !== null) stops.push(await startWeb(web, house.room().config.dataFolder, house.log))
    const ticking = setInterval(() => house.tick(), TICK_MS)
    stops.push(() => clearInterval(ticking))
    const hearing = setInterval(() => void house.hearDecisions(), HEAR_MS)
    stops.push(() => clearInterval(hearing))
    house.tick()
    house.log.info({ room: house.room().config.room, data: house.room().config.dataFolder }, 'the daemon is up')
    house.log.info({ signal: await asked }, 'the daemon stops')
  } finally {
    for (const stop of stops.reverse()) await stop()
    await house.close()
  }
}

/** Takes in everything that waits, evaluates, tries once to send what is due. */
export const runOnce = async (configFolder: string): Promise<void> => {
  const house = openHouse(configFolder, startLog(process.env.TENDQ_LOG_LEVEL ?? 'warn'))
  try {
    const intake = await house.takeIn({ once: true })
    await intake.settleAll()
    await house.work()
    await house.judgeTimes()
    await house.sendLetters()
  } finally {
    await house.close()
  }
}

/** A watcher that is not ready by then works as soon as it is. */
const READY_MS = 5_000

const signalled = (): Promise<string> =>
  new Promise((resolve) => {
    process.once('SIGTERM', resolve)
    process.once('SIGINT', resolve)
  })

/** Calls back when the folder was quiet for a moment after a change. Events are a hint; SIGHUP always works. */
const watchConfiguration = async (folder: string, changed: () => void): Promise<Stop> => {
  const watcher = watch(folder, { ignoreInitial: true })
  let latest = 0
  watcher.on('all', async () => {
    latest += 1
    const mine = latest
    await wait(QUIET_MS)
    if (mine === latest) changed()
  })
  watcher.on('error', () => undefined)
  await Promise.race([new Promise<void>((resolve) => watcher.once('ready', resolve)), wait(READY_MS)])
  return () => watcher.close()
}
