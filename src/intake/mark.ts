import type { Stats } from 'node:fs'
import type { FileMark } from './types.ts'

/** @param trustInode false on network file systems, where inode numbers may change with every mount */
export const markOf = (stats: Stats, trustInode: boolean): FileMark => ({
  size: stats.size,
  mtimeMs: stats.mtimeMs,
  ctimeMs: stats.ctimeMs,
  inode: trustInode ? stats.ino % 2 ** 53 : 0,
})
