import { deflateRawSync, inflateRawSync } from 'node:zlib'
import type { Arrival, FileMark } from '../intake/types.ts'
import type { Db } from './open.ts'

export type ArrivalOutcome = 'stored' | 'repeated' | 'superseded' | 'rejected'

export interface StoredArrival {
  readonly id: number
  readonly instrument: string
  readonly file: string
  readonly sha256: string
  readonly mtimeMs: number
  readonly receivedAt: number
}

interface ArrivalRow {
  id: number
  instrument: string
  file: string
  sha256: string
  size: number
  inode: number
  mtime: number
  ctime: number
  received_at: number
}

const ARRIVAL = `SELECT id, instrument, file, sha256, size, inode, mtime, ctime, received_at FROM arrival`
const NO_OUTCOME = `NOT EXISTS (SELECT 1 FROM arrival_outcome o WHERE o.arrival = arrival.id)`

const stored = (row: ArrivalRow): StoredArrival => ({
  id: row.id,
  instrument: row.instrument,
  file: row.file,
  sha256: row.sha256,
  mtimeMs: row.mtime,
  receivedAt: row.received_at,
})

/** Files as they came: their bytes, and what became of them. */
export const arrivals = (db: Db) => {
  const addContent = db.prepare(`INSERT INTO content (sha256, size, bytes) VALUES (?, ?, ?)`)
  const hasContent = db.prepare(`SELECT 1 FROM content WHERE sha256 = ?`)
  const contentOf = db.prepare(`SELECT bytes FROM content WHERE sha256 = ?`)
  const addArrival = db.prepare(
    `INSERT INTO arrival (instrument, file, sha256, size, inode, mtime, ctime, received_at) VALUES (?, ?, ?, ?, ?, ?, ?, ?)`,
  )
  const newest = db.prepare<[string, string], ArrivalRow>(
    `${ARRIVAL} WHERE instrument = ? AND file = ? ORDER BY id DESC LIMIT 1`,
  )
  const versions = db.prepare<[string, string, number], ArrivalRow>(
    `${ARRIVAL} WHERE instrument = ? AND file = ? AND id < ? ORDER BY id DESC LIMIT 1`,
  )
  const earlierSame = db.prepare<[string, string, number], { id: number; outcome: string | null }>(
    `SELECT arrival.id, (SELECT outcome FROM arrival_outcome o WHERE o.arrival = arrival.id ORDER BY o.id DESC LIMIT 1) AS outcome
       FROM arrival WHERE instrument = ? AND sha256 = ? AND id < ? ORDER BY id LIMIT 1`,
  )
  const one = db.prepare<[number], ArrivalRow>(`${ARRIVAL} WHERE id = ?`)
  const pending = db.prepare<[number], ArrivalRow>(`${ARRIVAL} WHERE ${NO_OUTCOME} ORDER BY id LIMIT ?`)
  const pendingCount = db.prepare<[], { n: number }>(`SELECT count(*) AS n FROM arrival WHERE ${NO_OUTCOME}`)
  const lastReceived = db.prepare<[string], { at: number | null }>(
    `SELECT max(received_at) AS at FROM arrival WHERE instrument = ?`,
  )
  const addOutcome = db.prepare(`INSERT INTO arrival_outcome (arrival, outcome, reason, at) VALUES (?, ?, ?, ?)`)

  const bytesOf = (sha256: string): Uint8Array => {
    const row = contentOf.get(sha256) as { bytes: Buffer } | undefined
    if (row === undefined) throw new Error(`no content ${sha256}`)
    return inflateRawSync(row.bytes)
  }

  return {
    /** Commits bytes and arrival before it returns: from here on nothing can be lost. */
    claim: db.transaction((arrival: Arrival, receivedAt: number): number => {
      if (hasContent.get(arrival.sha256) === undefined)
        addContent.run(arrival.sha256, arrival.bytes.length, deflateRawSync(arrival.bytes, { level: 6 }))
      const { size, inode, mtimeMs, ctimeMs } = arrival.mark
      const added = addArrival.run(
        arrival.instrument,
        arrival.file,
        arrival.sha256,
        size,
        inode,
        mtimeMs,
        ctimeMs,
        receivedAt,
      )
      return Number(added.lastInsertRowid)
    }).immediate,

    /** Mark of the newest version of a file that was claimed. */
    seen: (instrument: string, file: string): FileMark | null => {
      const row = newest.get(instrument, file)
      return row === undefined ? null : { size: row.size, mtimeMs: row.mtime, ctimeMs: row.ctime, inode: row.inode }
    },

    /** The version of the same file that arrived before this one. */
    before: (arrival: StoredArrival): StoredArrival | null => {
      const row = versions.get(arrival.instrument, arrival.file, arrival.id)
      return row === undefined ? null : stored(row)
    },

    /** An earlier arrival of the same bytes on the same instrument, whatever its name. */
    sameBefore: (arrival: StoredArrival) => earlierSame.get(arrival.instrument, arrival.sha256, arrival.id) ?? null,

    get: (id: number): StoredArrival | null => {
      const row = one.get(id)
      return row === undefined ? null : stored(row)
    },

    /** Arrivals without an outcome, in order of arrival: what a crash or a backlog left to do. */
    pending: (limit: number): readonly StoredArrival[] => pending.all(limit).map(stored),
    pendingCount: (): number => pendingCount.get()!.n,

    /** When the newest file of an instrument arrived; null when none has. */
    lastReceivedAt: (instrument: string): number | null => lastReceived.get(instrument)?.at ?? null,

    bytesOf,
    addOutcome: (arrival: number, outcome: ArrivalOutcome, reason: string | null, at: number): void => {
      addOutcome.run(arrival, outcome, reason, at)
    },
  }
}
