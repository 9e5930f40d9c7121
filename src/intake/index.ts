/*
 * watch → look → settle → read → claim
 *
 * Looks run one after the other. What an event says is a hint that a look at one path may be worth while; the full
 * scan, at the start and on a timer, needs no hints and finds everything.
 */
import { performance } from 'node:perf_hooks'
import { setTimeout as sleep } from 'node:timers/promises'
import { type Folder, openFolder } from './folder.ts'
import { emptySurvey, type Survey, type Surveyor, surveyAll, surveySome } from './survey.ts'
import { takeInOrder } from './take.ts'
import { inTheirTurn } from './turn.ts'
import type { FileTrouble, Intake, IntakeOptions, ScanReport, StartIntake, WaitingFile } from './types.ts'

export type * from './types.ts'

export const INTAKE_DEFAULTS: IntakeOptions = {
  scanEveryMs: 180_000,
  checkEveryMs: 5_000,
  settleMs: 1_000,
  giveUpMs: 60_000,
  sizeLimitBytes: 100e6,
  answerMs: 30_000,
  once: false,
}

/** Hints are gathered for so long: a writer raises one with every write. */
const GATHER_MS = 20
/** More hints than this are a reason to look at everything. */
const MANY_HINTS = 5_000

/** Starts taking files in. Never throws: what is wrong with a folder is told, and looked after until it is mended. */
export const startIntake: StartIntake = (instruments, ports, given = {}): Intake => {
  const options: IntakeOptions = { ...INTAKE_DEFAULTS, ...given }
  const stopping = new AbortController()
  const stopped = stopping.signal
  const clock = (): number => performance.now()
  const by: Surveyor = { ports, options, clock, stopped }
  const hints = new Map<Folder, Set<string>>()
  const timers = new Map<string, NodeJS.Timeout>()
  let queue: Promise<unknown> = Promise.resolve()
  let fullScanQueued: Promise<ScanReport> | null = null

  const later = (what: string, delayMs: number, job: () => void): void => {
    if (stopped.aborted || options.once) return
    clearTimeout(timers.get(what))
    timers.set(what, setTimeout(job, Math.max(0, delayMs)))
  }

  /** One job after the other: never two looks at once. */
  const inTurn = <T>(job: () => Promise<T>): Promise<T> => {
    const turn = queue.then(job)
    queue = turn.catch(() => {})
    return turn
  }

  const hint = (folder: Folder, path: string): void => {
    if (stopped.aborted || path.startsWith('../')) return
    // A timer that every hint set anew would never ring under a steady writer.
    if (hints.size === 0) later('hints', GATHER_MS, () => background(followHints))
    const paths = hints.get(folder) ?? new Set()
    hints.set(folder, paths)
    paths.add(paths.size < MANY_HINTS ? path : '')
  }

  const folders = instruments.map((instrument) => openFolder(instrument, ports, options, hint, stopped))

  const nextDueMs = (): number => {
    let next = Number.POSITIVE_INFINITY
    for (const folder of folders) for (const { dueMs } of folder.waiting.values()) next = Math.min(next, dueMs)
    return next
  }

  /** Takes what has settled, and orders the next look at what has not. */
  const conclude = async (survey: Survey): Promise<number> => {
    const claimed = await takeInOrder(by, inTheirTurn(survey.settled))
    const next = nextDueMs()
    if (next < Number.POSITIVE_INFINITY) later('due', next - clock(), () => background(() => lookAtDue(false)))
    return claimed
  }

  const scan = async (which: readonly Folder[], trustTimes: boolean): Promise<ScanReport> => {
    const startedAt = ports.now()
    const began = clock()
    const survey = emptySurvey()
    await Promise.all(which.map((folder) => surveyAll(by, folder, trustTimes, survey)))
    const claimed = await conclude(survey)
    const { files, skipped, unreachable } = survey
    const waiting = which.reduce((sum, folder) => sum + folder.waiting.size, 0)
    return { startedAt, tookMs: clock() - began, files, skipped, claimed, waiting, unreachable }
  }

  const lookAt = async (wanted: ReadonlyMap<Folder, Iterable<string>>, trustTimes: boolean): Promise<void> => {
    const survey = emptySurvey()
    await Promise.all([...wanted].map(([folder, paths]) => surveySome(by, folder, paths, trustTimes, survey)))
    await conclude(survey)
  }

  const lookAtDue = async (trustTimes: boolean): Promise<void> => {
    const now = clock()
    const due = (folder: Folder) => [...folder.waiting].filter(([, { dueMs }]) => dueMs <= now).map(([file]) => file)
    await lookAt(
      new Map(folders.map((folder) => [folder, due(folder)] as const).filter(([, f]) => f.length > 0)),
      trustTimes,
    )
  }

  const followHints = async (): Promise<void> => {
    const gathered = new Map(hints)
    hints.clear()
    const everywhere = [...gathered].filter(([, paths]) => paths.has('')).map(([folder]) => folder)
    for (const folder of everywhere) gathered.delete(folder)
    if (gathered.size > 0) await lookAt(gathered, false)
    if (everywhere.length > 0) await scan(everywhere, false)
  }

  /** Folders without events are scanned, the others checked: one that came back is scanned by that. */
  const checkFolders = async (): Promise<void> => {
    try {
      const polled = folders.filter((folder) => folder.polls() && clock() >= folder.scanned.againMs)
      if (polled.length > 0) await scan(polled, false)
      await lookAt(new Map(folders.filter((folder) => !polled.includes(folder)).map((folder) => [folder, []])), false)
    } finally {
      later('check', options.checkEveryMs, () => background(checkFolders))
    }
  }

  const scanAll = (trustTimes: boolean): Promise<ScanReport> => {
    const turn = inTurn(async () => {
      fullScanQueued = null
      for (const folder of folders) await folder.rewatch()
      const report = await scan(folders, trustTimes)
      later('scan', options.scanEveryMs, () => void scanAll(false).catch(lookFailed))
      return report
    })
    fullScanQueued = turn
    return turn
  }

  // A fault of the ports, the database's for instance, ends one look and nothing else.
  const lookFailed = (): void => later('scan', options.checkEveryMs, () => void scanAll(false).catch(lookFailed))
  const background = (job: () => Promise<unknown>): void => void inTurn(job).catch(lookFailed)

  const settleAll = async (): Promise<void> => {
    const patienceEndsMs = clock() + options.giveUpMs + 2 * options.settleMs
    await scanAll(true)
    for (let due = nextDueMs(); due <= patienceEndsMs && !stopped.aborted; due = nextDueMs()) {
      await sleep(Math.max(1, due - clock()), undefined, { signal: stopped }).catch(() => {})
      await inTurn(() => lookAtDue(true))
    }
  }

  if (!options.once) {
    scanAll(false).catch(lookFailed)
    later('check', options.checkEveryMs, () => background(checkFolders))
  }

  return {
    scanNow: () => fullScanQueued ?? scanAll(false),
    settleAll,
    waiting: (): readonly WaitingFile[] =>
      folders.flatMap(({ instrument, waiting }) =>
        [...waiting].map(([file, { mark, since, why }]) => ({
          instrument: instrument.name,
          file,
          sizeBytes: mark.size,
          since,
          why,
        })),
      ),
    troubles: (): readonly FileTrouble[] => folders.flatMap(({ troubles }) => troubles.list()),
    state: () => folders.map(({ state }) => state()),
    stop: async () => {
      stopping.abort()
      for (const timer of timers.values()) clearTimeout(timer)
      await queue
      await Promise.all(folders.map((folder) => folder.close()))
    },
  }
}
