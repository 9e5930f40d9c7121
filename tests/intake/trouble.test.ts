import { execFileSync, spawn, spawnSync } from 'node:child_process'
import { appendFile, chmod, mkdir, readdir, rename, rm, stat, symlink, truncate, writeFile } from 'node:fs/promises'
import { createServer } from 'node:net'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { answerOf } from '../../src/intake/answer.ts'
import { readWhole } from '../../src/intake/readWhole.ts'
import { openRoom, pause, type Room, until } from './dropFolder.ts'

let room: Room
beforeEach(async () => {
  room = await openRoom()
})
afterEach(() => room.end())

const isRoot = process.getuid?.() === 0
const kinds = () => room.events.map(({ kind }) => kind)

describe('a drop folder that is not there', () => {
  it('absent at start: told once, looked for all the time, watched when it comes', async () => {
    await rm(room.folder, { recursive: true })
    const intake = room.start()
    await pause(350)
    expect(kinds()).toEqual(['unreachable'])
    expect(room.events[0]).toMatchObject({ instrument: 'uv1', fault: { place: { at: room.folder } } })
    expect(intake.state()[0]).toMatchObject({ reachable: false, lastScanAt: null })
    await mkdir(room.folder)
    await writeFile(room.path('a.csv'), 'END')
    await until(() => room.arrivals.length === 1)
    expect(kinds()).toEqual(['unreachable', 'reachable'])
    await until(() => intake.state()[0]?.heardBy === 'events')
    await writeFile(room.path('b.csv'), 'END')
    await until(() => room.arrivals.length === 2)
  })

  it('removed and made again at once, between two looks: it is watched anew', async () => {
    const intake = room.start()
    await until(() => intake.state()[0]?.heardBy === 'events')
    for (let round = 1; round <= 3; round++) {
      await rm(room.folder, { recursive: true })
      await mkdir(room.folder)
      await pause(300)
      await writeFile(room.path(`${round}.csv`), `${round} END`)
      await until(() => room.arrivals.length === round)
    }
    expect(room.files()).toEqual(['1.csv', '2.csv', '3.csv'])
  })

  it('removed for a while: told once, and told when it is back', async () => {
    const intake = room.start()
    await intake.scanNow()
    await rename(room.folder, `${room.folder}-away`)
    await until(() => kinds().includes('unreachable'))
    await pause(300)
    await rename(`${room.folder}-away`, room.folder)
    await until(() => kinds().includes('reachable'))
    expect(kinds()).toEqual(['unreachable', 'reachable'])
  })

  it('a file where the folder should be is said to be no folder', async () => {
    await rm(room.folder, { recursive: true })
    await writeFile(room.folder, 'x')
    const intake = room.start({ once: true })
    expect((await intake.scanNow()).unreachable).toEqual(['uv1'])
    expect(room.events).toMatchObject([{ kind: 'unreachable', fault: { what: expect.stringContaining('no folder') } }])
  })

  it('one instrument’s missing folder does not keep another’s files out', async () => {
    await writeFile(room.path('a.csv'), 'END')
    const { startIntake } = await import('../../src/intake/index.ts')
    const folders = [
      { name: 'gone', dropFolder: `${room.folder}-none`, files: '*.csv' },
      { name: 'uv1', dropFolder: room.folder, files: '*.csv' },
    ]
    const intake = startIntake(folders, room.ports, { once: true, settleMs: 50 })
    await intake.settleAll()
    await intake.stop()
    expect(room.files()).toEqual(['a.csv'])
  })

  it('unmounted: the bare directory beneath is not taken for the drop folder', async (test) => {
    const mount = () => execFileSync('mount', ['-t', 'tmpfs', 'none', room.folder], { stdio: 'pipe' })
    try {
      mount()
    } catch {
      return test.skip('this account may not mount a file system')
    }
    try {
      const intake = room.start()
      await writeFile(room.path('a.csv'), 'END')
      await until(() => room.arrivals.length === 1)
      execFileSync('umount', ['-l', room.folder])
      await until(() => kinds().includes('unreachable'))
      expect(intake.state()[0]?.why).toContain('not mounted any more')
      mount()
      await writeFile(room.path('b.csv'), 'END')
      await until(() => room.arrivals.length === 2)
      expect(kinds()).toEqual(['unreachable', 'reachable'])
    } finally {
      spawnSync('umount', ['-l', room.folder])
    }
  })

  it('a file system that does not answer is given up on, and so is one that answers after the stop', async () => {
    const never = new Promise<never>(() => {})
    const stop = new AbortController()
    await expect(answerOf(never, 20, stop.signal)).rejects.toMatchObject({ code: 'ETIMEDOUT' })
    stop.abort()
    await expect(answerOf(never, 60_000, stop.signal)).rejects.toMatchObject({ code: 'ETIMEDOUT' })
  })
})

describe('what is no plain file is refused, once, and never opened', () => {
  it('a pipe, which would block whoever opens it', async () => {
    execFileSync('mkfifo', [room.path('pipe.csv')])
    await writeFile(room.path('a.csv'), 'END')
    const intake = room.start()
    await until(() => room.arrivals.length === 1)
    await intake.scanNow()
    expect(room.events).toMatchObject([{ kind: 'refused', file: 'pipe.csv', fault: { code: 'special-file' } }])
    expect(room.files()).toEqual(['a.csv'])
  })

  it('a pipe that took a file’s place after the look does not block whoever reads', async () => {
    execFileSync('mkfifo', [room.path('pipe.csv')])
    const { size, mtimeMs, ctimeMs, ino } = await stat(room.path('pipe.csv'))
    expect(await readWhole(room.path('pipe.csv'), { size, mtimeMs, ctimeMs, inode: ino })).toEqual({ kind: 'changed' })
  })

  it('a socket', async () => {
    const server = createServer().listen(room.path('s.csv'))
    await new Promise((resolve) => server.once('listening', resolve))
    await room.start({ once: true }).settleAll()
    server.close()
    expect(room.events).toMatchObject([{ kind: 'refused', fault: { what: expect.stringContaining('socket') } }])
  })

  it('a symbolic link out of the folder, to a file or to a folder of files', async () => {
    await mkdir(`${room.folder}-secret`)
    await writeFile(`${room.folder}-secret/a.csv`, 'END')
    await symlink(`${room.folder}-secret/a.csv`, room.path('file.csv'))
    await symlink(`${room.folder}-secret`, room.path('folder'))
    const intake = room.start({ once: true })
    await intake.settleAll()
    await intake.scanNow()
    expect(room.arrivals).toEqual([])
    expect(room.events.map((event) => ('file' in event ? event.file : '')).toSorted()).toEqual(['file.csv', 'folder'])
    expect(intake.troubles().map(({ fault }) => fault.code)).toEqual(['link-leaves-folder', 'link-leaves-folder'])
  })

  it('a link that leads nowhere, or in a circle; a link within the folder is taken', async () => {
    await symlink('nothing', room.path('nowhere.csv'))
    await symlink('circle.csv', room.path('circle.csv'))
    await mkdir(room.path('sub'))
    await symlink('..', room.path('sub/round'))
    await writeFile(room.path('2026.dat'), 'END')
    await symlink('2026.dat', room.path('latest.csv'))
    await room.start({ once: true }).settleAll()
    expect(room.files()).toEqual(['latest.csv'])
    expect(room.events.map((event) => event.kind === 'refused' && event.fault.code)).toEqual([
      'link-leads-nowhere',
      'link-leads-nowhere',
    ])
  })

  it('a file larger than the limit, with both sizes said; a smaller version of it is welcome', async () => {
    await writeFile(room.path('big.csv'), '')
    await truncate(room.path('big.csv'), 200_000)
    const intake = room.start({ once: true, sizeLimitBytes: 150_000 })
    await intake.settleAll()
    await intake.settleAll()
    expect(room.events).toMatchObject([{ kind: 'too-large', file: 'big.csv' }])
    expect(intake.troubles()[0]?.fault.what).toMatch(/^0\.2 MB is more than the 0\.15 MB/)
    expect(intake.waiting()).toEqual([])
    await writeFile(room.path('big.csv'), 'END')
    await intake.settleAll()
    expect(room.texts()).toEqual(['END'])
    expect(room.events[1]).toMatchObject({ kind: 'mended', was: 'too-large', how: 'taken' })
    expect(intake.troubles()).toEqual([])
  })

  it('a file of no bytes is taken, to be set aside with a reason', async () => {
    await writeFile(room.path('empty.csv'), '')
    await room.start({ once: true, giveUpMs: 300 }).settleAll()
    expect(room.arrivals[0]?.bytes).toHaveLength(0)
  })

  it('a name that is not UTF-8 is said, not passed over', async () => {
    await writeFile(Buffer.concat([Buffer.from(`${room.folder}/`), Buffer.from([0xe4]), Buffer.from('.csv')]), 'END')
    expect(await readdir(room.folder)).toEqual(['\ufffd.csv'])
    await room.start({ once: true }).settleAll()
    expect(room.events).toMatchObject([{ kind: 'refused', fault: { code: 'name-not-utf8' } }])
  })

  it('a refused file that is taken away is told to be gone', async () => {
    await symlink('nothing', room.path('nowhere.csv'))
    const intake = room.start({ once: true })
    await intake.scanNow()
    await rm(room.path('nowhere.csv'))
    await intake.scanNow()
    expect(room.events[1]).toEqual({
      kind: 'mended',
      instrument: 'uv1',
      file: 'nowhere.csv',
      was: 'refused',
      how: 'gone',
    })
  })
})

describe('a fault at one file is a result, never the end of the scan', () => {
  /** Runs as an account without rights; the superuser reads everything. */
  const asNobody = async (job: () => Promise<void>): Promise<void> => {
    process.seteuid?.(65534)
    try {
      await job()
    } finally {
      process.seteuid?.(0)
    }
  }

  it.skipIf(!isRoot)(
    'files and a subfolder without permission: told once, the rest is taken, and they too when mended',
    async () => {
      await chmod(room.folder.replace(/\/drop$/, ''), 0o755)
      await mkdir(room.path('locked'), { mode: 0o700 })
      for (const file of ['x.csv', 'y.csv', 'locked/z.csv', 'good.csv']) await writeFile(room.path(file), 'END')
      for (const file of ['x.csv', 'y.csv']) await chmod(room.path(file), 0o600)
      const intake = room.start({ once: true })
      await asNobody(async () => {
        await intake.settleAll()
        await intake.scanNow()
      })
      expect(room.files()).toEqual(['good.csv'])
      expect(room.events).toMatchObject([{ kind: 'unreadable', fault: { what: 'cannot be read: permission denied' } }])
      expect(
        intake
          .troubles()
          .map(({ file }) => file)
          .toSorted(),
      ).toEqual(['locked', 'x.csv', 'y.csv'])
      expect(intake.waiting().map(({ why }) => why)).toEqual(Array(2).fill('cannot be read: permission denied'))
      for (const file of ['locked', 'x.csv', 'y.csv']) await chmod(room.path(file), 0o755)
      await asNobody(() => intake.settleAll())
      expect(room.files().toSorted()).toEqual(['good.csv', 'locked/z.csv', 'x.csv', 'y.csv'])
      await intake.scanNow()
      expect(kinds()).toEqual(['unreadable', 'mended'])
      expect(intake.troubles()).toEqual([])
    },
  )

  it('no file handles left: told, and tried again', async (test) => {
    const limits = process.report?.getReport() as { userLimits?: { open_files?: { soft: string; hard: string } } }
    const { soft, hard } = limits.userLimits?.open_files ?? {}
    if (soft === undefined) return test.skip('the limit of open files is not known here')
    const intake = room.start()
    await intake.scanNow()
    const starve = `prlimit --pid ${process.pid} --nofile=1:${hard} && sleep 0.6; prlimit --pid ${process.pid} --nofile=${soft}:${hard}`
    const starving = spawn('sh', ['-c', starve], { stdio: 'ignore' })
    const ended = new Promise((resolve) => starving.once('exit', resolve))
    await pause(150)
    await expect(writeFile(room.path('probe'), '')).rejects.toMatchObject({ code: 'EMFILE' }) // it really happens
    const scan = intake.scanNow()
    await ended
    await scan
    expect(kinds()).toContain('unreadable')
    expect(intake.state()[0]?.reachable).toBe(true)
    await writeFile(room.path('a.csv'), 'END')
    await until(() => room.arrivals.length === 1)
    await intake.scanNow()
    expect(kinds()).toEqual(['unreadable', 'mended'])
  })

  it('a full disk: every file stays waiting, it is told once, and all are kept when there is room', async () => {
    const claim = room.ports.claim
    room.ports.claim = () => {
      throw Object.assign(new Error('database or disk is full'), { code: 'SQLITE_FULL' })
    }
    for (const file of ['a.csv', 'b.csv', 'c.csv']) await writeFile(room.path(file), 'END')
    const intake = room.start({ once: true })
    await intake.settleAll()
    expect(room.events).toMatchObject([{ kind: 'not-claimed', fault: { what: 'cannot be kept: the disk is full' } }])
    expect(intake.waiting()).toHaveLength(3)
    room.ports.claim = claim
    await intake.settleAll()
    expect(room.files()).toEqual(['a.csv', 'b.csv', 'c.csv'])
    expect(kinds()).toEqual(['not-claimed', 'mended'])
  })

  it('a reader that dies does not keep a file out for ever', async () => {
    room.ports.readsCompletely = () => Promise.reject(new Error('worker ended'))
    await writeFile(room.path('a.csv'), 'END')
    await room.start({ once: true, giveUpMs: 400 }).settleAll()
    expect(room.files()).toEqual(['a.csv'])
  })

  it('a database that cannot be asked ends one look, not the taking in', async () => {
    const seen = room.ports.seen
    let asked = 0
    room.ports.seen = (...of) => {
      if (asked++ < 3) throw new Error('database is locked')
      return seen(...of)
    }
    await writeFile(room.path('a.csv'), 'END')
    const intake = room.start()
    await until(() => room.arrivals.length === 1)
    expect(asked).toBeGreaterThan(3)
    expect(intake.state()[0]?.reachable).toBe(true)
  })
})

describe('stopping', () => {
  it('nothing is claimed after the stop, and nothing is left running', async () => {
    const intake = room.start()
    await until(() => intake.state()[0]?.heardBy === 'events')
    await Promise.all(Array.from({ length: 200 }, (_, i) => writeFile(room.path(`${i}.csv`), 'END')))
    await until(() => room.arrivals.length > 0)
    const stopping = intake.stop()
    const claimed = room.arrivals.length
    await stopping
    await appendFile(room.path('0.csv'), 'END')
    await pause(300)
    expect(room.arrivals).toHaveLength(claimed)
  })
})
