import { mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { hostname } from 'node:os'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import { EXIT, FaultError } from '../fault.ts'

/**
 * The data folder belongs to one daemon at a time. An exclusive transaction on a second SQLite file holds it:
 * the operating system frees it whatever way the process ends.
 */
export const holdDataFolder = (dataFolder: string, since: Date): { release(): void } => {
  mkdirSync(dataFolder, { recursive: true, mode: 0o750 })
  const db = new Database(join(dataFolder, 'tendq.lock'), { timeout: 1_000 }) // `status` may look at this instant
  try {
    db.exec('BEGIN EXCLUSIVE')
  } catch (error) {
    db.close()
    if ((error as { code?: string }).code !== 'SQLITE_BUSY') throw error
    throw new FaultError(
      [
        {
          code: 'held',
          place: { at: dataFolder },
          what: `another daemon holds this data folder (${holder(dataFolder)})`,
          remedy: 'stop that one first, or name another data folder',
        },
      ],
      EXIT.tryAgain,
    )
  }
  const who = `process ${process.pid} on ${hostname()} since ${since.toISOString()}`
  writeFileSync(join(dataFolder, 'tendq.holder'), `${who}\n`)
  return { release: () => db.close() }
}

/** Whether a daemon holds the folder now, and which one. */
export const whoHolds = (dataFolder: string): string | null => {
  try {
    const db = new Database(join(dataFolder, 'tendq.lock'), { timeout: 0, fileMustExist: true })
    try {
      db.exec('BEGIN EXCLUSIVE; ROLLBACK')
      return null
    } finally {
      db.close()
    }
  } catch (error) {
    return (error as { code?: string }).code === 'SQLITE_BUSY' ? holder(dataFolder) : null
  }
}

const holder = (dataFolder: string): string => {
  try {
    return readFileSync(join(dataFolder, 'tendq.holder'), 'utf8').trim()
  } catch {
    return 'it left no name'
  }
}
