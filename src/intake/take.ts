import { notClaimed, tooLarge, unreadable } from './faults.ts'
import type { Folder } from './folder.ts'
import { readWhole, type WholeRead } from './readWhole.ts'
import type { Look } from './settle.ts'
import type { Surveyor } from './survey.ts'

/** A file that has settled. */
export interface Settled {
  readonly folder: Folder
  readonly file: string
  readonly path: string
  readonly look: Look
  /** Whether it is taken only if it reads completely. */
  readonly ifComplete: boolean
}

/** So many files, or bytes, are in memory at a time: enough to keep two workers busy. */
const GROUP_FILES = 8
const GROUP_BYTES = 32e6

const byTime = (a: Settled, b: Settled): number =>
  a.look.mark.mtimeMs - b.look.mark.mtimeMs ||
  (a.file < b.file ? -1 : a.file > b.file ? 1 : 0) ||
  (a.folder.instrument.name < b.folder.instrument.name ? -1 : 1)

function* groups(settled: readonly Settled[]): Generator<readonly Settled[]> {
  let group: Settled[] = []
  let bytes = 0
  for (const one of settled) {
    if (group.length === GROUP_FILES || (group.length > 0 && bytes + one.look.mark.size > GROUP_BYTES)) {
      yield group
      group = []
      bytes = 0
    }
    group.push(one)
    bytes += one.look.mark.size
  }
  if (group.length > 0) yield group
}

/** Reads and claims settled files in order of their time and name. Returns how many were claimed. */
export const takeInOrder = async (
  { ports, options, clock, stopped }: Surveyor,
  settled: readonly Settled[],
): Promise<number> => {
  const postpone = ({ folder, file }: Settled, why: string): void => {
    const waiting = folder.waiting.get(file)
    if (waiting !== undefined) folder.waiting.set(file, { ...waiting, dueMs: Number.POSITIVE_INFINITY, why })
  }

  const read = async (one: Settled): Promise<WholeRead | null> => {
    const { folder, file, path, look } = one
    if (look.mark.size > options.sizeLimitBytes) {
      const fault = tooLarge(folder.instrument.dropFolder, file, look.mark.size, options.sizeLimitBytes)
      folder.waiting.delete(file)
      folder.troubles.note({ file, kind: 'too-large', fault, mark: look.mark })
      return null
    }
    return folder.ask(() => readWhole(path, look.mark)).catch((error): WholeRead => ({ kind: 'failed', error }))
  }

  const readsCompletely = async ({ folder, file, ifComplete }: Settled, whole: WholeRead | null): Promise<boolean> =>
    whole?.kind === 'read' &&
    (!ifComplete || ports.readsCompletely(folder.instrument.name, file, whole.bytes).catch(() => false))

  /** True if it was claimed. */
  const conclude = (one: Settled, whole: WholeRead, complete: boolean): boolean => {
    const { folder, file, look } = one
    const { name, dropFolder } = folder.instrument
    if (whole.kind === 'changed') {
      const waiting = folder.waiting.get(file)
      if (waiting) folder.waiting.set(file, { ...waiting, dueMs: clock() + options.settleMs })
      return false
    }
    if (whole.kind === 'failed') {
      const fault = unreadable(dropFolder, file, whole.error)
      postpone(one, fault.what)
      folder.troubles.note({ file, kind: 'unreadable', fault, mark: null })
      return false
    }
    if (!complete) {
      const waiting = folder.waiting.get(file)
      const dueMs = look.sinceMs + options.giveUpMs
      if (waiting)
        folder.waiting.set(file, { ...waiting, incomplete: true, dueMs, why: 'does not read completely yet' })
      return false
    }
    try {
      const { bytes, sha256 } = whole
      ports.claim({ instrument: name, file, bytes, sha256, mark: look.mark, mtimeMs: look.mark.mtimeMs })
    } catch (error) {
      const fault = notClaimed(dropFolder, file, error)
      postpone(one, fault.what)
      folder.troubles.note({ file, kind: 'not-claimed', fault, mark: null })
      return false
    }
    folder.waiting.delete(file)
    folder.troubles.mend(file, 'taken')
    return true
  }

  let claimed = 0
  for (const group of groups(settled.toSorted(byTime))) {
    const reads: { one: Settled; whole: WholeRead | null; complete: Promise<boolean> }[] = []
    for (const one of group) {
      if (stopped.aborted) return claimed
      const whole = await read(one) // one after the other: the workers check the first while the next is read
      reads.push({ one, whole, complete: readsCompletely(one, whole) })
    }
    for (const { one, whole, complete } of reads) {
      const isComplete = await complete
      if (stopped.aborted) return claimed
      if (whole !== null && conclude(one, whole, isComplete)) claimed++
    }
  }
  return claimed
}
