/*
 * One drop folder: whether it is there, whether it is still the same one, and whether its changes are heard of.
 * A watch is bound to a directory, not to a name: when the folder is removed and made again, or something is mounted
 * over it, the old watch stays silent for ever. So the folder's identity is checked, and a new one is watched anew.
 */
import { readFile, realpath, stat } from 'node:fs/promises'
import { answerOf, noAnswer } from './answer.ts'
import { unmounted, unreachable, unwatched } from './faults.ts'
import { isNetworkFileSystem, type Mount, mountOf } from './mounts.ts'
import { fileNames } from './names.ts'
import type { Look } from './settle.ts'
import type { Place } from './sight.ts'
import { keepTroubles, type Troubles } from './troubles.ts'
import type { DropFolder, FolderState, IntakeOptions, IntakePorts } from './types.ts'
import { watchFolder } from './watch.ts'

export interface WaitingLook extends Look {
  /** Next look, on the clock that never jumps; Infinity: with the next full scan. */
  readonly dueMs: number
  readonly why: string
  /** Epoch milliseconds. */
  readonly since: number
}

export interface Folder {
  readonly instrument: DropFolder
  readonly waiting: Map<string, WaitingLook>
  readonly troubles: Troubles
  readonly state: () => FolderState
  /** What the last complete scan found. */
  scanned: {
    readonly at: number | null
    /** Not to be polled again before, so that polling takes a tenth of the time at most. */
    readonly againMs: number
    readonly files: number
    readonly passedOver: number
  }
  /** Whether changes must be looked for. */
  readonly polls: () => boolean
  /** Is it there? Watches it where it is new. `appeared`: it was away or is another one than before. */
  check(): Promise<
    { readonly kind: 'there'; readonly place: Place; readonly appeared: boolean } | { readonly kind: 'away' }
  >
  /** It was there and could not be read. */
  lost(error: unknown): Promise<void>
  /** Work on this folder that must answer in time. Only one hangs at a time, lest a dead share eat all threads. */
  ask<T>(work: () => Promise<T>): Promise<T>
  /** Tries to watch again where that failed. */
  rewatch(): Promise<void>
  close(): Promise<void>
}

interface Present {
  readonly identity: string
  readonly place: Place
  readonly mount: Mount | null
}

const mountinfo = (): Promise<string> => readFile('/proc/self/mountinfo', 'utf8').catch(() => '')

export const openFolder = (
  instrument: DropFolder,
  ports: IntakePorts,
  options: IntakeOptions,
  hint: (folder: Folder, relativePath: string) => void,
  stopped: AbortSignal,
): Folder => {
  const { name, dropFolder } = instrument
  const names = fileNames(instrument.files)
  let present: Present | null = null
  let why: string | null = 'not looked at yet'
  let told = false
  let hanging = false
  /** A mount that was under the folder once: the bare directory beneath it is not the drop folder. */
  let mountPoint: string | null = null
  let watcher: { close(): Promise<void> } | null = null
  let watching: 'off' | 'starting' | 'on' | 'failed' = 'off'
  let unwatchedTold = false

  const polls = (): boolean =>
    instrument.watch === 'polling' ||
    (instrument.watch !== 'events' && present?.mount != null && isNetworkFileSystem(present.mount.type))

  const unwatch = async (): Promise<void> => {
    const old = watcher
    watcher = null
    watching = 'off'
    await old?.close().catch(() => {})
  }

  const failed = (error: unknown): void => {
    watching = 'failed'
    if (unwatchedTold) return
    unwatchedTold = true
    ports.tell({ kind: 'unwatched', instrument: name, fault: unwatched(dropFolder, error) })
  }

  const startWatching = (place: Place): void => {
    if (options.once || stopped.aborted || polls()) return
    watching = 'starting'
    // A watcher that was replaced may still speak.
    let mine: typeof watcher = null
    const current = (): boolean => mine === null || mine === watcher
    try {
      mine = (ports.watch ?? watchFolder)(place.root, names.recursive, {
        hint: (path) => current() && hint(folder, path),
        failed: (error) => current() && failed(error),
        ready: () => {
          if (!current() || watching !== 'starting') return
          watching = 'on'
          if (unwatchedTold) ports.tell({ kind: 'watched', instrument: name })
          unwatchedTold = false
          hint(folder, '') // what came between the scan and now
        },
      })
      watcher = mine
    } catch (error) {
      failed(error)
    }
  }

  const away = async (error: unknown, fault = unreachable(dropFolder, error)): Promise<{ kind: 'away' }> => {
    present = null
    why = `${fault.what}; ${fault.remedy}`
    folder.waiting.clear()
    if (!told) ports.tell({ kind: 'unreachable', instrument: name, fault })
    told = true
    await unwatch()
    return { kind: 'away' }
  }

  const find = async (): Promise<Present> => {
    const root = await realpath(dropFolder)
    const stats = await stat(root)
    if (!stats.isDirectory()) throw Object.assign(new Error('not a directory'), { code: 'ENOTDIR' })
    // A new directory may get the old inode number, but not its time of birth.
    const identity = `${root} ${stats.dev} ${stats.ino} ${stats.birthtimeMs}`
    if (identity === present?.identity) return present
    const mount = mountOf(await mountinfo(), root)
    const trustInode = mount === null || !isNetworkFileSystem(mount.type)
    return { identity, place: { dropFolder, root, names, trustInode }, mount }
  }

  const folder: Folder = {
    instrument,
    waiting: new Map(),
    troubles: keepTroubles(name, ports.tell),
    scanned: { at: null, againMs: 0, files: 0, passedOver: 0 },
    polls,
    ask: async (work) => {
      if (hanging) throw noAnswer()
      hanging = true
      const running = work()
      const answered = (): void => {
        hanging = false
      }
      running.then(answered, answered)
      return answerOf(running, options.answerMs, stopped)
    },
    check: async () => {
      let found: Present
      try {
        found = await folder.ask(find)
      } catch (error) {
        return stopped.aborted ? { kind: 'away' } : away(error)
      }
      const below = mountPoint !== null && found.mount !== null && found.mount.mountPoint.length < mountPoint.length
      if (below && found.place.root.startsWith(mountPoint ?? ''))
        return away(null, unmounted(dropFolder, mountPoint ?? ''))
      const appeared = found !== present
      present = found
      why = null
      mountPoint = found.mount?.mountPoint ?? mountPoint
      if (appeared) {
        await unwatch()
        startWatching(found.place)
        if (told) ports.tell({ kind: 'reachable', instrument: name })
        told = false
      }
      return { kind: 'there', place: found.place, appeared }
    },
    lost: async (error) => void (await away(error)),
    rewatch: async () => {
      if (watching !== 'failed' || present === null) return
      await unwatch()
      startWatching(present.place)
    },
    close: unwatch,
    state: () => ({
      instrument: name,
      dropFolder,
      reachable: present !== null,
      why,
      lastScanAt: folder.scanned.at,
      files: folder.scanned.files,
      passedOver: folder.scanned.passedOver,
      heardBy: polls() ? 'polling' : watching === 'on' ? 'events' : 'none',
    }),
  }
  return folder
}
