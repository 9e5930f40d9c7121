import { createHash } from 'node:crypto'
import { appendFile, mkdir, readFile, rename, stat, utimes, writeFile } from 'node:fs/promises'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { openRoom, pause, type Room, until } from './dropFolder.ts'

let room: Room
beforeEach(async () => {
  room = await openRoom()
})
afterEach(() => room.end())

/** Heard of by events within a moment: the full scan is a minute away. */
const heard = async (intake: ReturnType<Room['start']>) => until(() => intake.state()[0]?.heardBy === 'events')

describe('a file is taken when it is whole', () => {
  it('a writer who pauses longer than the settling time is waited for, and its file comes once and whole', async () => {
    const intake = room.start()
    await heard(intake)
    await writeFile(room.path('a.csv'), 'one\n')
    for (const line of ['two\n', 'three\n']) {
      await pause(250)
      await appendFile(room.path('a.csv'), line)
    }
    await pause(250)
    expect(room.checked.length).toBeGreaterThan(0) // it was read in a pause, and found wanting
    expect(intake.waiting()).toMatchObject([{ file: 'a.csv', why: 'does not read completely yet' }])
    expect(room.arrivals).toEqual([])
    await appendFile(room.path('a.csv'), 'END\n')
    await until(() => room.arrivals.length === 1)
    expect(room.texts()).toEqual(['one\ntwo\nthree\nEND\n'])
    await pause(250)
    expect(room.arrivals).toHaveLength(1)
    expect(intake.waiting()).toEqual([])
  })

  it('it is taken when it has settled, long before a scan would find it', async () => {
    const intake = room.start()
    await heard(intake)
    await writeFile(room.path('a.csv'), 'END')
    const writtenAt = performance.now()
    await until(() => room.arrivals.length === 1)
    expect(performance.now() - writtenAt).toBeLessThan(2_000)
  })

  it('the hash is the SHA-256 of the bytes, which are those of the file', async () => {
    const bytes = Buffer.from([0, 255, 128, 13, 10, ...Buffer.from('END')])
    await writeFile(room.path('a.csv'), bytes)
    await room.start({ once: true }).settleAll()
    expect(room.arrivals[0]?.sha256).toBe(createHash('sha256').update(bytes).digest('hex'))
    expect(Buffer.from(room.arrivals[0]?.bytes ?? [])).toEqual(bytes)
  })

  it('a file renamed into place is taken under its last name only', async () => {
    const intake = room.start()
    await heard(intake)
    await writeFile(room.path('a.csv.part'), 'half')
    await pause(250)
    await writeFile(room.path('a.csv.part'), 'whole END')
    await rename(room.path('a.csv.part'), room.path('a.csv'))
    await until(() => room.arrivals.length === 1)
    expect(room.files()).toEqual(['a.csv'])
    expect(room.texts()).toEqual(['whole END'])
  })

  it('a broken file is taken as it is after it rested, and its completed version after that', async () => {
    const intake = room.start({ giveUpMs: 600 })
    await heard(intake)
    const writtenAt = performance.now()
    await writeFile(room.path('a.csv'), 'broken')
    await until(() => room.arrivals.length === 1)
    expect(performance.now() - writtenAt).toBeGreaterThanOrEqual(600)
    expect(room.checked).toEqual(['a.csv']) // it was checked once, not again and again
    await appendFile(room.path('a.csv'), ' no more END')
    await until(() => room.arrivals.length === 2)
    expect(room.texts()).toEqual(['broken', 'broken no more END'])
  })

  it('a file that changes while it is checked comes whole or not at all', async () => {
    const readsCompletely = room.ports.readsCompletely
    let appended = false
    room.ports.readsCompletely = async (...of) => {
      const answer = await readsCompletely(...of)
      if (!appended) await appendFile(room.path('a.csv'), 'and more END')
      appended = true
      return answer
    }
    await writeFile(room.path('a.csv'), 'whole END')
    const intake = room.start()
    await until(() => room.texts().at(-1) === 'whole ENDand more END')
    expect(appended).toBe(true)
    expect(intake.waiting()).toEqual([])
  })

  it('the same bytes under another name, a copy, and a touched file are offered, for the store to say `repeated`', async () => {
    await writeFile(room.path('a.csv'), 'END')
    const intake = room.start({ once: true })
    await intake.settleAll()
    await writeFile(room.path('b.csv'), 'END')
    await utimes(room.path('a.csv'), 1e9, 1e9)
    await intake.settleAll()
    expect(room.files().toSorted()).toEqual(['a.csv', 'a.csv', 'b.csv'])
    expect(new Set(room.arrivals.map(({ sha256 }) => sha256)).size).toBe(1)
  })

  it('what was dealt with is not read again, not even by the next start', async () => {
    await writeFile(room.path('a.csv'), 'END')
    await room.start({ once: true }).settleAll()
    room.checked.length = 0
    const report = await room.start({ once: true }).scanNow()
    expect(report).toMatchObject({ files: 1, skipped: 1, claimed: 0, waiting: 0 })
    expect(room.checked).toEqual([])
    expect(room.arrivals).toHaveLength(1)
  })

  it('files are taken in the order of their time, then their name', async () => {
    for (const [file, seconds] of [
      ['c.csv', 100],
      ['b.csv', 300],
      ['a.csv', 300],
      ['d.csv', 200],
    ] as const) {
      await writeFile(room.path(file), `${file} END`)
      await utimes(room.path(file), seconds, seconds)
    }
    await room.start({ once: true }).settleAll()
    expect(room.files()).toEqual(['c.csv', 'd.csv', 'a.csv', 'b.csv'])
  })

  it('a thousand files dropped at once all come, each once', async () => {
    const intake = room.start()
    await heard(intake)
    await mkdir(room.path('run'))
    const names = Array.from({ length: 1_000 }, (_, i) => `run/${i}.csv`)
    await Promise.all(names.map((name) => writeFile(room.path(name), `${name} END`)))
    await until(() => room.arrivals.length >= 1_000)
    await intake.scanNow()
    expect(room.files().toSorted()).toEqual(names.toSorted())
  })

  it('a folder moved into place is found with all that lies in it', async () => {
    const intake = room.start()
    await heard(intake)
    await mkdir(`${room.folder}-elsewhere/deep`, { recursive: true })
    await writeFile(`${room.folder}-elsewhere/deep/a.csv`, 'END')
    await rename(`${room.folder}-elsewhere`, room.path('moved'))
    await until(() => room.arrivals.length === 1)
    expect(room.files()).toEqual(['moved/deep/a.csv'])
  })

  it('drop files are left as they were: bytes, times, names', async () => {
    await writeFile(room.path('a.csv'), 'END')
    const before = await stat(room.path('a.csv'))
    await room.start({ once: true }).settleAll()
    const after = await stat(room.path('a.csv'))
    expect(await readFile(room.path('a.csv'), 'utf8')).toBe('END')
    expect([after.mtimeMs, after.ctimeMs, after.ino, after.mode]).toEqual([
      before.mtimeMs,
      before.ctimeMs,
      before.ino,
      before.mode,
    ])
  })
})

describe('without events', () => {
  it('what no event told of is found by the scan', async () => {
    room.ports.watch = () => ({ close: async () => {} }) // deaf
    const intake = room.start({ scanEveryMs: 300 })
    await intake.scanNow()
    await writeFile(room.path('a.csv'), 'END')
    await until(() => room.arrivals.length === 1)
    expect(intake.state()[0]?.heardBy).toBe('none')
  })

  it('a watcher that fails is told once, scans go on, and it is told when it works again', async () => {
    let failures = 0
    room.ports.watch = (_folder, _recursive, hears) => {
      queueMicrotask(() => {
        if (failures++ < 3) hears.failed(Object.assign(new Error('no space left'), { code: 'ENOSPC' }))
        else hears.ready()
      })
      return { close: async () => {} }
    }
    const intake = room.start({ scanEveryMs: 150 })
    await writeFile(room.path('a.csv'), 'END')
    await until(() => room.arrivals.length === 1 && room.events.length === 2)
    expect(failures).toBe(4)
    expect(room.events).toMatchObject([
      { kind: 'unwatched', fault: { code: 'drop-folder-unwatched' } },
      { kind: 'watched' },
    ])
    expect(intake.state()[0]?.heardBy).toBe('events')
  })

  it('a share is polled', async () => {
    let watched = false
    room.ports.watch = () => {
      watched = true
      return { close: async () => {} }
    }
    const intake = room.start({}, { watch: 'polling' })
    await intake.scanNow()
    await writeFile(room.path('a.csv'), 'END')
    await until(() => room.arrivals.length === 1)
    expect(watched).toBe(false)
    expect(intake.state()[0]?.heardBy).toBe('polling')
  })
})

describe('taking in once', () => {
  it('files that rest are taken, a broken one after its minute, one that keeps growing is left waiting', async () => {
    await writeFile(room.path('good.csv'), 'END')
    await writeFile(room.path('broken.csv'), 'bro')
    await writeFile(room.path('growing.csv'), '')
    const growing = setInterval(() => void appendFile(room.path('growing.csv'), 'x'), 20)
    const intake = room.start({ once: true, giveUpMs: 600 })
    try {
      await intake.settleAll()
    } finally {
      clearInterval(growing)
    }
    expect(room.files().toSorted()).toEqual(['broken.csv', 'good.csv'])
    expect(intake.waiting().map(({ file }) => file)).toEqual(['growing.csv'])
  })

  it('files that nobody has touched for long are taken at first sight', async () => {
    await writeFile(room.path('a.csv'), 'broken')
    await pause(320)
    const began = performance.now()
    await room.start({ once: true, giveUpMs: 300, settleMs: 5_000 }).settleAll()
    expect(performance.now() - began).toBeLessThan(1_000)
    expect(room.files()).toEqual(['a.csv'])
  })

  it('a modification time set to long ago does not make a new file old', async () => {
    await writeFile(room.path('a.csv'), 'broken')
    await utimes(room.path('a.csv'), 1e9, 1e9)
    const report = await room.start({ once: true }).scanNow()
    expect(report).toMatchObject({ claimed: 0, waiting: 1 })
  })
})
