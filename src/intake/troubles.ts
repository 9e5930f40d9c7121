import type { Fault } from '../fault.ts'
import { sameMark } from './settle.ts'
import type { FileMark, FileTrouble, FileTroubleKind, IntakeEvent } from './types.ts'

export interface NewTrouble {
  readonly file: string
  readonly kind: FileTroubleKind
  readonly fault: Fault
  /** The version that was refused, where another version may be welcome. */
  readonly mark: FileMark | null
}

export interface Troubles {
  has(file: string, mark: FileMark): boolean
  note(trouble: NewTrouble): void
  /** The file is all right, or not there any more. */
  mend(file: string, how: 'taken' | 'gone'): void
  /** Files that trouble was noted of. */
  files(): Iterable<string>
  list(): readonly FileTrouble[]
}

/** `unreadable` and `not-claimed` have a cause outside the file, a full disk for instance, that strikes many at once. */
const causeOf = ({ kind, file, fault }: NewTrouble): string =>
  kind === 'unreadable' || kind === 'not-claimed' ? `${kind}: ${fault.what}` : `${kind}: ${file}`

/** What is wrong with the files of one instrument: each cause is told once, and once when its last file is mended. */
export const keepTroubles = (instrument: string, tell: (event: IntakeEvent) => void): Troubles => {
  const open = new Map<string, NewTrouble>()
  const openByCause = new Map<string, number>()

  const close = (trouble: NewTrouble): boolean => {
    open.delete(trouble.file)
    const cause = causeOf(trouble)
    const left = (openByCause.get(cause) ?? 1) - 1
    if (left > 0) openByCause.set(cause, left)
    else openByCause.delete(cause)
    return left === 0
  }

  return {
    has: (file, mark) => {
      const trouble = open.get(file)
      return trouble?.mark != null && sameMark(trouble.mark, mark)
    },
    note: (trouble) => {
      const cause = causeOf(trouble)
      const known = open.get(trouble.file)
      const isNew = !openByCause.has(cause)
      if (known !== undefined) close(known)
      open.set(trouble.file, trouble)
      openByCause.set(cause, (openByCause.get(cause) ?? 0) + 1)
      if (isNew) tell({ kind: trouble.kind, instrument, file: trouble.file, fault: trouble.fault })
    },
    mend: (file, how) => {
      const trouble = open.get(file)
      if (trouble !== undefined && close(trouble)) tell({ kind: 'mended', instrument, file, was: trouble.kind, how })
    },
    files: () => open.keys(),
    list: () => [...open.values()].map(({ file, kind, fault }) => ({ instrument, file, kind, fault })),
  }
}
