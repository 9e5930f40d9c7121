/*
 * When is a file whole? Nobody says so: a text file has no end mark, and whoever writes it may pause. So a file is
 * read when two looks, some time apart, found it unchanged, and taken if it then reads completely. One that does not
 * is either still being written or broken; if nothing happened to it for a minute it is broken, and taken as it is,
 * so that it can be set aside with a reason.
 */
import type { FileMark } from './types.ts'

/** What is remembered of a file that waits. Times are of a clock that never jumps, in milliseconds. */
export interface Look {
  readonly mark: FileMark
  /** When this version was first seen. */
  readonly sinceMs: number
  /** It was read in this version, and did not read completely. */
  readonly incomplete: boolean
}

export type Decision =
  /** This version was dealt with earlier. */
  | { readonly kind: 'skip' }
  | { readonly kind: 'wait'; readonly look: Look; readonly untilMs: number }
  /** Unchanged twice: take it if it reads completely. */
  | { readonly kind: 'read'; readonly look: Look }
  /** Unchanged for long: take it whatever it is. */
  | { readonly kind: 'take'; readonly look: Look }

export interface Sight {
  /** Newest version dealt with. */
  readonly seen: FileMark | null
  readonly previous: Look | null
  readonly mark: FileMark
  readonly nowMs: number
  /**
   * Age of the younger of the file's two times by the wall clock; null where it must not count, because file times
   * are set by other machines' clocks.
   */
  readonly restedMs: number | null
}

export interface Patience {
  readonly settleMs: number
  readonly giveUpMs: number
}

export const sameMark = (a: FileMark, b: FileMark): boolean =>
  a.size === b.size && a.mtimeMs === b.mtimeMs && a.ctimeMs === b.ctimeMs && a.inode === b.inode

/** Says what to do with a file now that it was looked at. Pure. */
export const decide = ({ seen, previous, mark, nowMs, restedMs }: Sight, patience: Patience): Decision => {
  if (seen !== null && sameMark(seen, mark)) return { kind: 'skip' }
  const unchanged = previous !== null && sameMark(previous.mark, mark)
  const look = unchanged ? previous : { mark, sinceMs: nowMs, incomplete: false }
  const observedMs = nowMs - look.sinceMs
  if (observedMs >= patience.giveUpMs || (restedMs !== null && restedMs >= patience.giveUpMs)) {
    return { kind: 'take', look }
  }
  if (look.incomplete) return { kind: 'wait', look, untilMs: look.sinceMs + patience.giveUpMs }
  if (unchanged && observedMs >= patience.settleMs) return { kind: 'read', look }
  return { kind: 'wait', look, untilMs: look.sinceMs + Math.min(patience.settleMs, patience.giveUpMs) }
}
