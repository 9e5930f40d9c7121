import type { Folder, WaitingLook } from './folder.ts'
import type { Settled } from './take.ts'

/**
 * Which settled files may be taken now. A backlog is found in the order of the folder, not of time, so parts of it
 * settle apart; what was written first must be taken first, since a sample's first spectra become its reference. A
 * file therefore waits for older ones of its folder that are about to settle. It does not wait for one that does not
 * read completely, nor longer than a broken file would.
 */
export const inTheirTurn = (settled: readonly Settled[]): readonly Settled[] => {
  const settling = new Map<Folder, Settling | null>()
  for (const { folder } of settled) if (!settling.has(folder)) settling.set(folder, settlingIn(folder))
  return settled.filter((one) => {
    const older = settling.get(one.folder)
    if (!one.ifComplete || !older || isBefore(one.look.mark.mtimeMs, one.file, older)) return true
    const waiting = one.folder.waiting.get(one.file)
    if (waiting !== undefined)
      one.folder.waiting.set(one.file, { ...waiting, dueMs: older.allDueMs, why: 'waits for an older file' })
    return false
  })
}

/** The oldest file of a folder that is about to settle, and when all such will have. */
interface Settling {
  readonly mtimeMs: number
  readonly file: string
  readonly allDueMs: number
}

const settlingIn = ({ waiting }: Folder): Settling | null =>
  [...waiting].reduce<Settling | null>((found, [file, look]) => {
    if (!isSettling(look)) return found
    const { mtimeMs } = look.mark
    const allDueMs = Math.max(found?.allDueMs ?? 0, look.dueMs)
    return found === null || isBefore(mtimeMs, file, found)
      ? { mtimeMs, file, allDueMs }
      : { mtimeMs: found.mtimeMs, file: found.file, allDueMs }
  }, null)

const isSettling = ({ dueMs, incomplete }: WaitingLook): boolean => !incomplete && dueMs < Number.POSITIVE_INFINITY

const isBefore = (mtimeMs: number, file: string, other: Settling): boolean =>
  mtimeMs < other.mtimeMs || (mtimeMs === other.mtimeMs && file < other.file)
