// A folder with 100,000 old files: how long a scan takes, how long the main thread is kept from other work, memory;
// and how soon a new file among them is claimed after it settled.

import { fork } from 'node:child_process'
import { once } from 'node:events'
import { mkdir, mkdtemp, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { monitorEventLoopDelay, performance } from 'node:perf_hooks'
import { fileURLToPath } from 'node:url'

const FILES = 100_000
const SETTLE_MS = 1_000

const makeFiles = async (folder) => {
  await mkdir(folder)
  for (let first = 0; first < FILES; first += 1_000) {
    const names = Array.from(
      { length: 1_000 },
      (_, i) => `SAMPLE-${String(first + i).padStart(6, '0')}_20260302T0900.csv`,
    )
    await Promise.all(names.map((name) => writeFile(join(folder, name), 'x')))
  }
}

const megabytes = () => process.memoryUsage.rss() / 1e6

/** In a process of its own, so that its memory is that of intake and of nothing else. */
const measure = async (home) => {
  const { default: Database } = await import('better-sqlite3')
  const { startIntake } = await import('../../dist/intake/index.js')
  const { lstat, opendir } = await import('node:fs/promises')
  const folder = join(home, 'drop')
  const db = new Database(join(home, 'marks.db'))
  db.exec('CREATE TABLE mark (file TEXT PRIMARY KEY, size INTEGER, mtimeMs REAL, ctimeMs REAL, inode INTEGER) STRICT')
  const keep = db.prepare('INSERT OR REPLACE INTO mark VALUES (?, ?, ?, ?, ?)')
  db.exec('BEGIN')
  for await (const { name } of await opendir(folder)) {
    const { size, mtimeMs, ctimeMs, ino } = await lstat(join(folder, name))
    keep.run(name, size, mtimeMs, ctimeMs, ino)
  }
  db.exec('COMMIT')
  const find = db.prepare('SELECT size, mtimeMs, ctimeMs, inode FROM mark WHERE file = ?')
  const before = megabytes()
  let claimedAt = 0
  const ports = {
    seen: (_instrument, file) => find.get(file) ?? null,
    claim: ({ file, mark }) => {
      keep.run(file, mark.size, mark.mtimeMs, mark.ctimeMs, mark.inode)
      claimedAt = performance.now()
    },
    readsCompletely: async () => true,
    now: Date.now,
    tell: (event) => console.log('told:', JSON.stringify(event)),
  }
  const delay = monitorEventLoopDelay({ resolution: 1 })
  const began = performance.now()
  const intake = startIntake([{ name: 'uv1', dropFolder: folder, files: '**/*.csv' }], ports, { settleMs: SETTLE_MS })
  const first = await intake.scanNow()
  while (intake.state()[0].heardBy !== 'events') await new Promise((resolve) => setTimeout(resolve, 5))
  await intake.scanNow()
  const startedMs = performance.now() - began
  let peak = megabytes()
  const sampling = setInterval(() => {
    peak = Math.max(peak, megabytes())
  }, 5)
  delay.enable()
  const scans = []
  for (let i = 0; i < 5; i++) scans.push((await intake.scanNow()).tookMs)
  delay.disable()
  const latencies = []
  for (let i = 0; i < 5; i++) {
    await writeFile(join(folder, `new-${process.pid}-${i}.csv`), 'END')
    const writtenAt = performance.now()
    claimedAt = 0
    while (claimedAt === 0) await new Promise((resolve) => setTimeout(resolve, 2))
    latencies.push(claimedAt - writtenAt - SETTLE_MS)
  }
  clearInterval(sampling)
  await intake.stop()
  db.close()
  return {
    files: first.files,
    firstScanMs: first.tookMs,
    startedMs,
    scansMs: scans,
    longestTurnMs: delay.max / 1e6,
    latenciesMs: latencies,
    rssBeforeMb: before,
    rssPeakMb: peak,
  }
}

const ms = (value) => `${value.toFixed(0)} ms`

export const run = async () => {
  const home = await mkdtemp(join(tmpdir(), 'bench-intake-'))
  try {
    await makeFiles(join(home, 'drop'))
    const child = fork(fileURLToPath(import.meta.url), [home])
    const [figures] = await once(child, 'message')
    console.log(`intake, a folder with ${figures.files} old files, marks in SQLite`)
    console.log(
      `  start: first scan ${ms(figures.firstScanMs)}, watching and scanned again ${ms(figures.startedMs)} (at most 5000 ms)`,
    )
    console.log(`  scan when nothing is new: ${figures.scansMs.map(ms).join(', ')} (at most 2000 ms)`)
    console.log(`  longest turn of the main thread meanwhile: ${figures.longestTurnMs.toFixed(1)} ms`)
    console.log(`  new file claimed after it settled: ${figures.latenciesMs.map(ms).join(', ')} (at most 100 ms)`)
    console.log(
      `  memory: ${figures.rssBeforeMb.toFixed(0)} MB before, ${figures.rssPeakMb.toFixed(0)} MB at the most (at most 200 MB)`,
    )
  } finally {
    await rm(home, { recursive: true, force: true })
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url) && process.send) process.send(await measure(process.argv[2]))
else if (process.argv[1] === fileURLToPath(import.meta.url)) await run()
