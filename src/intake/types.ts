import type { Instrument } from '../config/types.ts'
import type { Fault } from '../fault.ts'

/** What intake knows of an instrument. */
export interface DropFolder extends Pick<Instrument, 'name' | 'dropFolder' | 'files'> {
  /** How changes are found; absent: `polling` on network file systems, which raise no events, `events` elsewhere. */
  readonly watch?: 'events' | 'polling'
}

/** Cheap identity of one version of a file: equal marks mean that nobody has written to it in between. */
export interface FileMark {
  readonly size: number
  readonly mtimeMs: number
  readonly ctimeMs: number
  /** 0 on network file systems, where inode numbers may change with every mount; modulo 2⁵³. */
  readonly inode: number
}

/** A whole file, ready to be kept. */
export interface Arrival {
  readonly instrument: string
  /** Path relative to the drop folder, forward slashes. */
  readonly file: string
  readonly bytes: Uint8Array
  /** Lower-case hexadecimal. */
  readonly sha256: string
  readonly mark: FileMark
  readonly mtimeMs: number
}

/** What intake needs of the rest of the daemon. */
export interface IntakePorts {
  /** Mark of the newest version of this file that was claimed; null if never. Asked for every file of every scan. */
  seen(instrument: string, file: string): FileMark | null
  /** Commits bytes and arrival before it returns. May throw: the file then stays waiting and is tried again. */
  claim(arrival: Arrival): void
  /** Whether the bytes read completely. Should run in a worker; a rejection counts as no. */
  readsCompletely(instrument: string, file: string, bytes: Uint8Array): Promise<boolean>
  /** Wall clock, epoch milliseconds. */
  now(): number
  /** Something went wrong that a person should hear of, or is mended again. */
  tell(event: IntakeEvent): void
  /** How changes are heard of; absent: chokidar. */
  watch?: Watch
}

/** Hears of changes below a folder. What it reports are hints: nothing depends on them but speed. */
export type Watch = (folder: string, recursive: boolean, hears: WatchHears) => { close(): Promise<void> }

export interface WatchHears {
  /** Something happened to this path, relative to the folder; '' when it is not known to which. */
  hint(relativePath: string): void
  failed(error: unknown): void
  ready(): void
}

export type FileTroubleKind = 'refused' | 'too-large' | 'unreadable' | 'not-claimed'

/** Each trouble is told once, and once more when it is over. Files with the same `unreadable` or `not-claimed` cause are told as one. */
export type IntakeEvent =
  | { readonly kind: 'unreachable' | 'unwatched'; readonly instrument: string; readonly fault: Fault }
  | { readonly kind: 'reachable' | 'watched'; readonly instrument: string }
  | { readonly kind: FileTroubleKind; readonly instrument: string; readonly file: string; readonly fault: Fault }
  /** `taken`: the file was claimed or needs no claim; `gone`: it is not there any more. */
  | {
      readonly kind: 'mended'
      readonly instrument: string
      readonly file: string
      readonly was: FileTroubleKind
      readonly how: 'taken' | 'gone'
    }

export interface IntakeOptions {
  /** Between two full scans; default 3 min. */
  readonly scanEveryMs: number
  /** Between two scans of a folder without events (a network share), and two checks that a folder is there; 5 s. */
  readonly checkEveryMs: number
  /** Between the two looks that must agree; 1 s. On network shares at least `checkEveryMs`. */
  readonly settleMs: number
  /** A file unchanged for so long is taken even if it does not read completely; 60 s. */
  readonly giveUpMs: number
  /** Larger files are refused; 100 MB. */
  readonly sizeLimitBytes: number
  /** A file system that is silent for so long counts as unreachable; 30 s. */
  readonly answerMs: number
  /** No watching and no timers: looks happen only when asked for. */
  readonly once: boolean
}

/** A file that was seen and not yet claimed. */
export interface WaitingFile {
  readonly instrument: string
  readonly file: string
  readonly sizeBytes: number
  /** When its present version was first seen, epoch milliseconds. */
  readonly since: number
  /** In words, such as `does not read completely yet`. */
  readonly why: string
}

/** A file that intake does not take, or cannot take at present. */
export interface FileTrouble {
  readonly instrument: string
  readonly file: string
  readonly kind: FileTroubleKind
  readonly fault: Fault
}

export interface FolderState {
  readonly instrument: string
  readonly dropFolder: string
  readonly reachable: boolean
  /** Why not, where it is not. */
  readonly why: string | null
  /** End of the last complete scan, epoch milliseconds. */
  readonly lastScanAt: number | null
  /** Files in it whose names match. */
  readonly files: number
  /** Files whose names match no pattern or look temporary. */
  readonly passedOver: number
  /** `events`: changes are heard of at once; `polling`: found by frequent scans; `none`: found by the full scan only. */
  readonly heardBy: 'events' | 'polling' | 'none'
}

export interface ScanReport {
  readonly startedAt: number
  readonly tookMs: number
  /** Matching files looked at, and how many of them were already dealt with. */
  readonly files: number
  readonly skipped: number
  readonly claimed: number
  readonly waiting: number
  /** Instruments whose folder could not be scanned. */
  readonly unreachable: readonly string[]
}

export interface Intake {
  /** Looks at every file of every folder. Resolves when a scan that began after the call has ended. */
  scanNow(): Promise<ScanReport>
  /** Scans, then waits until no file waits that a minute of patience can decide. */
  settleAll(): Promise<void>
  waiting(): readonly WaitingFile[]
  troubles(): readonly FileTrouble[]
  state(): readonly FolderState[]
  /** No claim happens after it was called. Resolves when nothing of intake runs any more. */
  stop(): Promise<void>
}

export type StartIntake = (
  instruments: readonly DropFolder[],
  ports: IntakePorts,
  options?: Partial<IntakeOptions>,
) => Intake
