import { join } from 'node:path'
import type { Fault } from '../fault.ts'

/** Error code of the operating system, such as `EACCES`; otherwise the error's name. */
export const errorCode = (error: unknown): string =>
  error instanceof Error ? ((error as NodeJS.ErrnoException).code ?? error.name) : 'error'

const message = (error: unknown): string => (error instanceof Error ? error.message : String(error))

const MEANS: Readonly<Record<string, readonly [what: string, remedy: string]>> = {
  EACCES: ['permission denied', 'allow the account that tendq runs under to read it'],
  EPERM: ['permission denied', 'allow the account that tendq runs under to read it'],
  EMFILE: ['this process has too many files open', 'raise its limit of open files; it is tried again'],
  ENFILE: ['the machine has too many files open', 'raise its limit of open files; it is tried again'],
  EIO: ['the disk or share reports a read error', 'check the disk or the connection; it is tried again'],
  ESTALE: ['the share was replaced under the mount', 'mount it again'],
  ENOENT: ['there is no such folder', 'create or mount it, or correct `drop:`; it is looked for all the time'],
  ENOTDIR: ['this is no folder', 'correct `drop:`'],
  ENOSPC: ['the system allows no more watches', 'raise fs.inotify.max_user_watches; until then scans find new files'],
  ETIMEDOUT: ['the file system does not answer', 'check the share or the disk; it is tried again'],
}

const fault = (code: string, at: string, what: string, remedy: string): Fault => ({ code, place: { at }, what, remedy })

const explained = (code: string, at: string, error: unknown, prefix: string): Fault => {
  const [what, remedy] = MEANS[errorCode(error)] ?? [message(error), 'see to it; it is tried again']
  return fault(code, at, `${prefix}: ${what}`, remedy)
}

export const unreachable = (folder: string, error: unknown): Fault =>
  explained('drop-folder-unreachable', folder, error, 'the drop folder cannot be read')

export const unmounted = (folder: string, mountPoint: string): Fault =>
  fault(
    'drop-folder-unmounted',
    folder,
    `${mountPoint} is not mounted any more`,
    'mount it again, or restart tendq if the folder is now meant to lie on this disk',
  )

export const unwatched = (folder: string, error: unknown): Fault =>
  errorCode(error) === 'EMFILE'
    ? fault(
        'drop-folder-unwatched',
        folder,
        'changes are not heard of at once: too many watchers or open files',
        'raise fs.inotify.max_user_instances or the limit of open files; until then scans find new files',
      )
    : explained('drop-folder-unwatched', folder, error, 'changes are not heard of at once')

export const unreadable = (folder: string, file: string, error: unknown): Fault =>
  explained('file-unreadable', join(folder, file), error, 'cannot be read')

export const notClaimed = (folder: string, file: string, error: unknown): Fault =>
  errorCode(error) === 'ENOSPC' || errorCode(error) === 'SQLITE_FULL'
    ? fault('not-kept', join(folder, file), 'cannot be kept: the disk is full', 'make room; it is tried again')
    : fault('not-kept', join(folder, file), `cannot be kept: ${message(error)}`, 'see to it; it is tried again')

const inMegabytes = (bytes: number): string => `${(bytes / 1e6).toPrecision(4).replace(/\.?0+$/, '')} MB`

export const tooLarge = (folder: string, file: string, bytes: number, limitBytes: number): Fault =>
  fault(
    'file-too-large',
    join(folder, file),
    `${inMegabytes(bytes)} is more than the ${inMegabytes(limitBytes)} that a file may have`,
    'export fewer spectra to one file, or keep other files out with `files:`',
  )

export const linkLeavesFolder = (folder: string, file: string, target: string): Fault =>
  fault(
    'link-leaves-folder',
    join(folder, file),
    `is a symbolic link to ${target}, outside the drop folder`,
    'put a copy of the file in its place',
  )

export const linkLeadsNowhere = (folder: string, file: string): Fault =>
  fault('link-leads-nowhere', join(folder, file), 'is a symbolic link that leads nowhere', 'remove or mend the link')

export const specialFile = (folder: string, file: string, kind: string): Fault =>
  fault('special-file', join(folder, file), `is a ${kind}, not a file`, 'put a regular file in its place')

export const unspeakableName = (folder: string, file: string): Fault =>
  fault('name-not-utf8', join(folder, file), 'has a name that is not UTF-8', 'rename the file')
