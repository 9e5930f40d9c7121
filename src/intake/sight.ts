/*
 * Looking without touching: names and metadata only. Nothing is opened but folders, so a pipe cannot block and a
 * device cannot be woken. Errors of one file are sightings like any other.
 */
import { type Dirent, lstat, type Stats } from 'node:fs'
import { opendir, realpath, stat } from 'node:fs/promises'
import { join, sep } from 'node:path'
import type { Fault } from '../fault.ts'
import { errorCode, linkLeadsNowhere, linkLeavesFolder, specialFile, unspeakableName } from './faults.ts'
import { markOf } from './mark.ts'
import type { FileNames } from './names.ts'
import type { FileMark } from './types.ts'

export type Sighting =
  /** `path`: where its bytes are, free of symbolic links below the root. */
  | { readonly kind: 'file'; readonly file: string; readonly path: string; readonly mark: FileMark }
  | { readonly kind: 'refused'; readonly file: string; readonly fault: Fault }
  | { readonly kind: 'unreadable'; readonly file: string; readonly error: unknown }
  | { readonly kind: 'gone'; readonly file: string }
  /** Not one of the instrument's files. */
  | { readonly kind: 'passed-over' }
  /** The folder itself could not be read, or not to the end. */
  | { readonly kind: 'lost'; readonly error: unknown }

export interface Place {
  /** As configured, for messages. */
  readonly dropFolder: string
  /** The same without symbolic links. */
  readonly root: string
  readonly names: FileNames
  readonly trustInode: boolean
}

const PASSED_OVER: Sighting = { kind: 'passed-over' }

/** As many at a time as keep the thread pool busy and the main thread free (0.35 s per 100,000 files, turns of 6 ms). */
const BATCH = 64

/** The callback form costs half of the promise form. */
const status = (path: string): Promise<Stats | { error: unknown }> =>
  new Promise((resolve) => lstat(path, (error, stats) => resolve(error ? { error } : stats)))

const specialKind = (stats: Stats): string => {
  if (stats.isFIFO()) return 'pipe'
  if (stats.isSocket()) return 'socket'
  return 'device'
}

const throughLink = async (place: Place, file: string): Promise<Sighting | 'folder'> => {
  try {
    const path = await realpath(join(place.root, file))
    const isBelow = path === place.root || path.startsWith(place.root.endsWith(sep) ? place.root : place.root + sep)
    if (!isBelow) return { kind: 'refused', file, fault: linkLeavesFolder(place.dropFolder, file, path) }
    const stats = await stat(path)
    // A folder is entered under its own name only: links to folders can run in circles.
    if (stats.isDirectory()) return 'folder'
    if (!stats.isFile())
      return { kind: 'refused', file, fault: specialFile(place.dropFolder, file, specialKind(stats)) }
    return { kind: 'file', file, path, mark: markOf(stats, place.trustInode) }
  } catch (error) {
    const lost = ['ENOENT', 'ELOOP', 'ENOTDIR'].includes(errorCode(error))
    return lost
      ? { kind: 'refused', file, fault: linkLeadsNowhere(place.dropFolder, file) }
      : { kind: 'unreadable', file, error }
  }
}

const sightOf = async (place: Place, file: string): Promise<Sighting | 'folder'> => {
  const path = `${place.root}/${file}`
  const stats = await status(path)
  if ('error' in stats) {
    const code = errorCode(stats.error)
    if (code !== 'ENOENT' && code !== 'ENOTDIR') return { kind: 'unreadable', file, error: stats.error }
    return file.includes('\ufffd')
      ? { kind: 'refused', file, fault: unspeakableName(place.dropFolder, file) }
      : { kind: 'gone', file }
  }
  if (stats.isFile()) return { kind: 'file', file, path, mark: markOf(stats, place.trustInode) }
  if (stats.isDirectory()) return 'folder'
  if (stats.isSymbolicLink()) return throughLink(place, file)
  return { kind: 'refused', file, fault: specialFile(place.dropFolder, file, specialKind(stats)) }
}

/** A name is worth a look if it is the instrument's; a link is when it might be a folder of files elsewhere. */
const worthALook = (place: Place, file: string, entry: Dirent): boolean =>
  place.names.matches(file) || (entry.isSymbolicLink() && place.names.recursive && place.names.enters(entry.name))

const look = async (place: Place, file: string): Promise<Sighting> => {
  const sighting = await sightOf(place, file)
  if (sighting === 'folder') return PASSED_OVER
  if (sighting.kind === 'file' && !place.names.matches(file)) return PASSED_OVER
  // A link that is none of the instrument's names matters only if it is a folder elsewhere.
  if (sighting.kind === 'refused' && !place.names.matches(file)) {
    const target = await stat(join(place.root, file)).catch(() => null)
    if (target === null || !target.isDirectory()) return PASSED_OVER
  }
  return sighting
}

/**
 * Every file below one folder, a batch at a time. A subfolder that cannot be opened is a sighting; an error of the
 * folder itself is thrown.
 *
 * @param below relative to the root, '' for all of it
 */
export async function* sightings(place: Place, below: string): AsyncGenerator<readonly Sighting[]> {
  const folders = [below]
  for (let folder = folders.pop(); folder !== undefined; folder = folders.pop()) {
    let batch: (Sighting | Promise<Sighting>)[] = []
    try {
      // Not `for await` over names of the whole folder: a large one is never held in memory.
      for await (const entry of await opendir(join(place.root, folder), { bufferSize: 256 })) {
        const file = folder === '' ? entry.name : `${folder}/${entry.name}`
        if (entry.isDirectory()) {
          if (place.names.recursive && place.names.enters(entry.name)) folders.push(file)
        } else {
          batch.push(worthALook(place, file, entry) ? look(place, file) : PASSED_OVER)
        }
        if (batch.length < BATCH) continue
        yield await Promise.all(batch)
        batch = []
      }
    } catch (error) {
      if (folder === below) throw error
      if (errorCode(error) !== 'ENOENT') yield [{ kind: 'unreadable', file: folder, error }]
    }
    if (batch.length > 0) yield await Promise.all(batch)
  }
}

/** What one path is now; the files below it if it is a folder. */
export async function* sightingsAt(place: Place, file: string): AsyncGenerator<readonly Sighting[]> {
  const sighting = await sightOf(place, file)
  if (sighting !== 'folder') {
    if (place.names.matches(file)) yield [sighting]
    return
  }
  const enters = place.names.recursive && file.split('/').every((name) => place.names.enters(name))
  const stats = await status(join(place.root, file))
  if (!enters || 'error' in stats || !stats.isDirectory()) return
  try {
    yield* sightings(place, file)
  } catch (error) {
    if (errorCode(error) !== 'ENOENT') yield [{ kind: 'unreadable', file, error }]
  }
}
