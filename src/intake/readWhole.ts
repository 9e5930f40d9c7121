import { createHash } from 'node:crypto'
import { constants, type Stats } from 'node:fs'
import { lstat, open } from 'node:fs/promises'
import { errorCode } from './faults.ts'
import { markOf } from './mark.ts'
import { sameMark } from './settle.ts'
import type { FileMark } from './types.ts'

export type WholeRead =
  | { readonly kind: 'read'; readonly bytes: Uint8Array; readonly sha256: string }
  /** Something happened to it since it was looked at: what was read may be half of each. */
  | { readonly kind: 'changed' }
  | { readonly kind: 'failed'; readonly error: unknown }

const CHUNK_BYTES = 1 << 20

// A pipe or a link that took the file's place in between must neither block nor lead elsewhere.
const FLAGS = constants.O_RDONLY | constants.O_NONBLOCK | constants.O_NOFOLLOW

/** All bytes of one version of a file, which must be the same before and after. */
export const readWhole = async (path: string, mark: FileMark): Promise<WholeRead> => {
  const isSame = (stats: Stats): boolean => stats.isFile() && sameMark(markOf(stats, mark.inode !== 0), mark)
  try {
    const handle = await open(path, FLAGS)
    try {
      if (!isSame(await handle.stat())) return { kind: 'changed' }
      const bytes = new Uint8Array(mark.size)
      const hash = createHash('sha256')
      let length = 0
      while (length < bytes.length) {
        const chunk = Math.min(CHUNK_BYTES, bytes.length - length)
        const { bytesRead } = await handle.read(bytes, length, chunk, length)
        if (bytesRead === 0) return { kind: 'changed' }
        hash.update(bytes.subarray(length, length + bytesRead))
        length += bytesRead
      }
      // The handle shows writes to the file, the path that another was renamed over it.
      if (!isSame(await handle.stat()) || !isSame(await lstat(path))) return { kind: 'changed' }
      return { kind: 'read', bytes, sha256: hash.digest('hex') }
    } finally {
      await handle.close()
    }
  } catch (error) {
    return ['ENOENT', 'ELOOP', 'ENXIO'].includes(errorCode(error)) ? { kind: 'changed' } : { kind: 'failed', error }
  }
}
