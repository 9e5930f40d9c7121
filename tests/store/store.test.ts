import Database from 'better-sqlite3'
import { describe, expect, it } from 'vitest'
import { FaultError } from '../../src/fault.ts'
import { databaseFile, holdDataFolder, openStore, openStoreReadOnly, storeOn, whoHolds } from '../../src/store/index.ts'
import { arrivalOf, freshFolder, freshStore } from './room.ts'

describe('the database', () => {
  it('syncs every commit and writes ahead', () => {
    const { db } = freshStore()
    expect(db.pragma('journal_mode', { simple: true })).toBe('wal')
    expect(db.pragma('synchronous', { simple: true })).toBe(2) // FULL
    expect(db.pragma('foreign_keys', { simple: true })).toBe(1)
  })

  it('refuses to change or delete what was measured, computed, decided or happened', () => {
    const { db, store } = freshStore()
    store.arrivals.claim(arrivalOf('1;2'), 1000)
    store.arrivals.addOutcome(1, 'stored', null, 1000)
    store.records.decide(1000, 'Ines', 'exclude', 'spectrum 1', 'empty cell')
    const attempts = [
      `UPDATE arrival SET file = 'b'`,
      `DELETE FROM arrival`,
      `UPDATE content SET size = 0`,
      `DELETE FROM arrival_outcome`,
      `UPDATE decision SET why = ''`,
      `INSERT OR REPLACE INTO decision (id, at, by, what, subject, why) VALUES (1, 0, '', '', '', '')`,
      `INSERT OR REPLACE INTO content (sha256, size, bytes) SELECT sha256, 0, x'' FROM content`,
    ]
    for (const sql of attempts) expect(() => db.exec(sql), sql).toThrow(/only added/)
    expect(new Uint8Array(store.arrivals.bytesOf(arrivalOf('1;2').sha256))).toEqual(arrivalOf('1;2').bytes)
  })

  it('refuses a database that a newer version wrote', () => {
    const folder = freshFolder()
    openStore(folder).close()
    const db = new Database(databaseFile(folder))
    db.pragma('user_version = 9999')
    db.close()
    expect(() => openStore(folder)).toThrow(/schema 9999/)
  })

  it('refuses a database that is not its own', () => {
    const folder = freshFolder()
    const db = new Database(databaseFile(folder))
    db.exec('CREATE TABLE other (a)')
    db.close()
    expect(() => openStoreReadOnly(folder)).toThrow(/no database of tendq/)
  })

  it('keeps what it holds when it is opened again', () => {
    const folder = freshFolder()
    const first = storeOn(openStore(folder))
    first.arrivals.claim(arrivalOf('x'), 5)
    first.close()
    const again = storeOn(openStore(folder))
    expect(again.arrivals.pending(10)).toHaveLength(1)
    again.close()
  })
})

describe('arrivals', () => {
  it('wait in order of arrival until they have an outcome', () => {
    const { store } = freshStore()
    const ids = ['a', 'b', 'c'].map((text) => store.arrivals.claim(arrivalOf(text, { file: `${text}.csv` }), 1))
    store.arrivals.addOutcome(ids[1]!, 'stored', null, 2)
    expect(store.arrivals.pending(10).map(({ id }) => id)).toEqual([ids[0], ids[2]])
    expect(store.arrivals.pendingCount()).toBe(2)
  })

  it('know the same bytes again under another name, on the same instrument only', () => {
    const { store } = freshStore()
    const first = store.arrivals.claim(arrivalOf('same'), 1)
    store.arrivals.claim(arrivalOf('same', { file: 'copy.csv' }), 2)
    store.arrivals.claim(arrivalOf('same', { instrument: 'uv2' }), 3)
    const [, copy, other] = store.arrivals.pending(10)
    expect(store.arrivals.sameBefore(copy!)?.id).toBe(first)
    expect(store.arrivals.sameBefore(other!)).toBeNull()
  })

  it('remember the mark of the newest version of a file', () => {
    const { store } = freshStore()
    expect(store.arrivals.seen('uv1', 'a.csv')).toBeNull()
    store.arrivals.claim(arrivalOf('1', { mtimeMs: 10 }), 1)
    store.arrivals.claim(arrivalOf('12', { mtimeMs: 20.5 }), 2)
    expect(store.arrivals.seen('uv1', 'a.csv')).toEqual({ size: 2, mtimeMs: 20.5, ctimeMs: 20.5, inode: 7 })
  })
})

describe('the data folder', () => {
  it('belongs to one daemon at a time; the second is told who holds it and to try again', () => {
    const folder = freshFolder()
    const held = holdDataFolder(folder, new Date(0))
    expect(whoHolds(folder)).toMatch(/process \d+ on /)
    let error: unknown
    try {
      holdDataFolder(folder, new Date(0))
    } catch (caught) {
      error = caught
    }
    expect(error).toBeInstanceOf(FaultError)
    expect((error as FaultError).exit).toBe(75)
    expect((error as FaultError).message).toContain(`process ${process.pid}`)
    held.release()
    expect(whoHolds(folder)).toBeNull()
    holdDataFolder(folder, new Date(0)).release()
  })
})

describe('letters', () => {
  const facts = { kind: 'test', room: 'North bench', at: '2026-03-02T09:00:00Z' } as const

  it('go once to each recipient and follow the thread of the first letter of their alarm', () => {
    const { store } = freshStore()
    const alarm = store.alarms.put({
      rule: 'r',
      of: 'sample',
      subject: 'S',
      study: null,
      priority: 'high',
      state: 'unacknowledged',
      active: true,
      latch: false,
      latched: false,
      shelvedUntil: null,
      raisedAt: 1,
      acknowledgedAt: null,
      acknowledgedBy: null,
      returnedAt: null,
      spectra: 1,
      diagnosis: null,
      confidence: null,
      message: 'm',
    })
    const id = (letter: number, to: string) => `<${letter}.${to}>`
    const to = ['a@lab.example', 'b@lab.example', 'a@lab.example']
    store.letters.add({ alarm, facts, subject: 's' }, to, 10, id)
    store.letters.add({ alarm, facts, subject: 's' }, to, 20, id)
    const due = store.letters.due(100, 10)
    expect(due.map(({ recipient }) => recipient)).toEqual([to[0], to[1], to[0], to[1]])
    expect(due[0]?.inReplyTo).toBeNull()
    expect(due[2]?.inReplyTo).toBe(due[0]?.messageId)
  })

  it('wait until they are due, and are out of the way once sent or given up', () => {
    const { store } = freshStore()
    store.letters.add(
      { alarm: null, facts, subject: 's' },
      ['a@lab.example', 'b@lab.example'],
      10,
      (n, to) => `<${n}${to}>`,
    )
    const [a, b] = store.letters.due(10, 10)
    store.letters.markLater(a!.id, 11, 500, 'the server is down')
    store.letters.markFailed(b!.id, 11, 'no such user')
    expect(store.letters.due(499, 10)).toEqual([])
    expect(store.letters.due(500, 10)[0]).toMatchObject({ attempts: 1, firstAttemptAt: 11, messageId: a!.messageId })
    store.letters.markSent(a!.id, 500)
    expect(store.letters.nextDueAt()).toBeNull()
    expect(store.letters.standing()).toMatchObject({ waiting: 0, failed: 1 })
  })
})
