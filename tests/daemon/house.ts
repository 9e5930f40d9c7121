import { type ChildProcess, spawn } from 'node:child_process'
import { mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import Database from 'better-sqlite3'
import { SMTPServer } from 'smtp-server'
import { onTestFinished } from 'vitest'

/** The built command; another build may be named for trying things out. */
export const CLI = process.env.TENDQ_CLI ?? fileURLToPath(new URL('../../dist/cli.js', import.meta.url))

/** Deterministic noise: a small linear congruential generator and the sum of twelve uniforms. */
export const noiseFrom = (seed: number): (() => number) => {
  let state = seed >>> 0
  const uniform = () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0
    return state / 2 ** 32
  }
  return () => Array.from({ length: 12 }, uniform).reduce((sum, u) => sum + u, -6)
}

/** A delimited file of two Gaussian bands in wavenumber, noise 0.0005. */
export const spectrumText = ({
  bands = [
    [19531, 3500, 0.45],
    [26667, 3900, 0.47],
  ] as readonly (readonly [center: number, width: number, height: number])[],
  seed = 1,
} = {}): string => {
  const noise = noiseFrom(seed)
  const lines = ['wavelength (nm),absorbance']
  for (let nm = 330; nm <= 700; nm++) {
    const perCm = 1e7 / (nm * 1.00028)
    const y = bands.reduce((sum, [c, w, h]) => sum + h * Math.exp(-4 * Math.LN2 * ((perCm - c) / w) ** 2), 0.02)
    lines.push(`${nm},${(y + 0.0005 * noise()).toFixed(5)}`)
  }
  return `${lines.join('\n')}\n`
}

const FILES = {
  'tendq.yaml': (port: number) => `room: Test bench
data: ../var
timezone: Europe/Dublin
keeper: [ keeper@lab.example ]
mail: { from: tendq@lab.example, host: 127.0.0.1, port: ${port}, security: none }
`,
  'instruments/uv1.yaml': () => `instrument: uv1
title: Bench
drop: ../drop
files: "**/*.{csv,dx}"
sample: { from: filename, pattern: "^(?<sample>.+)_(?<time>[0-9]{8}T[0-9]{4})" }
limits: { absorbance: 2.0 }
`,
  'species/chloro.yaml': () => `species: chloropentaammine
title: "[CrCl(NH3)5]2+"
ion: Cr3+
geometry: octahedral
state: solution
ligands: { NH3: 5, Cl-: 1 }
bands:
  - { role: nu1, near: 512 nm, within: 15 nm }
  - { role: nu2, near: 375 nm, within: 10 nm }
may-become:
  - { ligands: { NH3: 5, H2O: 1 }, cause: substitution, near: { nu1: 480 nm, nu2: 360 nm } }
`,
  'studies/aging.yaml': () => `study: aging
species: chloropentaammine
kind: stability
samples: [ { name: "AGE-*" } ]
conditions: { path: 10 mm }
reference: { first: 3 }
tell: [ stability@lab.example ]
`,
  'rules/bands.yaml': () => `rules:
  - rule: first-band-shift
    title: First band has moved
    of: sample
    studies: [ "*" ]
    when: "abs(nu1 - reference(nu1)) > max(4 * sqrt(u(nu1)^2 + u_reference(nu1)^2), 60 cm^-1)"
    clear: "abs(nu1 - reference(nu1)) < 30 cm^-1"
    persist: 2
    priority: high
`,
} as const

export interface TestRoom {
  readonly folder: string
  readonly config: string
  readonly data: string
  /** Puts a file into the drop folder. */
  drop(name: string, text: string | Uint8Array): void
  write(name: string, text: string): void
  /** Text of a configuration file. */
  read(name: string): string
  /** Rows of a query on the database; none while it does not exist. */
  rows<T = Record<string, unknown>>(sql: string): T[]
  /** Makes every letter that waits due now. */
  hurry(): void
  run(args: readonly string[], env?: Record<string, string>): Promise<Ended>
  start(): Promise<ChildProcess>
}

export interface Ended {
  readonly code: number | null
  readonly stdout: string
  readonly stderr: string
}

export const testRoom = (smtpPort = 9): TestRoom => {
  const folder = mkdtempSync(join(tmpdir(), 'tendq-room-'))
  const config = join(folder, 'config')
  const data = join(folder, 'var')
  const write = (name: string, text: string): void => {
    mkdirSync(dirname(join(config, name)), { recursive: true })
    writeFileSync(join(config, name), text)
  }
  for (const [name, text] of Object.entries(FILES)) write(name, text(smtpPort))
  mkdirSync(join(folder, 'drop'), { recursive: true })
  const children = new Set<ChildProcess>()
  onTestFinished(async () => {
    for (const child of children) child.kill('SIGKILL')
    rmSync(folder, { recursive: true, force: true, maxRetries: 5 })
  })
  const spawned = (args: readonly string[], env: Record<string, string> = {}) => {
    const child = spawn(process.execPath, [CLI, ...args], {
      cwd: folder,
      env: {
        ...process.env,
        TENDQ_SETTLE_MS: '100',
        TENDQ_GIVE_UP_MS: '1500',
        TENDQ_CONFIG: config,
        NO_COLOR: '1',
        ...env,
      },
      stdio: ['ignore', 'pipe', 'pipe'],
    })
    children.add(child)
    child.on('exit', () => children.delete(child))
    return child
  }
  return {
    folder,
    config,
    data,
    write,
    read: (name) => readFileSync(join(config, name), 'utf8'),
    drop: (name, text) => {
      mkdirSync(dirname(join(folder, 'drop', name)), { recursive: true })
      writeFileSync(join(folder, 'drop', name), text)
    },
    rows: <T>(sql: string) => {
      try {
        const db = new Database(join(data, 'tendq.db'), { readonly: true, fileMustExist: true })
        try {
          return db.prepare<[], T>(sql).all()
        } finally {
          db.close()
        }
      } catch (error) {
        if (/unable to open|directory does not exist|no such table/.test((error as Error).message)) return []
        throw error
      }
    },
    hurry: () => {
      const db = new Database(join(data, 'tendq.db'))
      db.exec(`UPDATE letter_recipient SET next_attempt_at = 0 WHERE state = 'waiting'`)
      db.close()
    },
    run: (args, env) => ended(spawned(args, env)),
    start: async () => {
      const child = spawned(['run'])
      await new Promise<void>((resolve, reject) => {
        let log = ''
        child.stderr!.on('data', (chunk: Buffer) => {
          log += chunk.toString()
          if (log.includes('the daemon is up')) resolve()
        })
        child.on('exit', (code) => reject(new Error(`the daemon ended with ${code}: ${log}`)))
      })
      return child
    },
  }
}

const ended = (child: ChildProcess): Promise<Ended> =>
  new Promise((resolve) => {
    let stdout = ''
    let stderr = ''
    child.stdout!.on('data', (chunk: Buffer) => {
      stdout += chunk.toString()
    })
    child.stderr!.on('data', (chunk: Buffer) => {
      stderr += chunk.toString()
    })
    child.on('close', (code) => resolve({ code, stdout, stderr }))
  })

export const exited = (child: ChildProcess): Promise<number | null> =>
  new Promise((resolve) => {
    // it may be over already
    if (child.exitCode !== null || child.signalCode !== null) resolve(child.exitCode)
    child.on('exit', (code) => resolve(code))
  })

/** Waits until it is so; fails with what was asked for when it never is. */
export const until = async (what: string, isSo: () => boolean, timeoutMs = 20_000): Promise<void> => {
  const end = Date.now() + timeoutMs
  while (!isSo()) {
    if (Date.now() > end) throw new Error(`never came true: ${what}`)
    await new Promise((resolve) => setTimeout(resolve, 50))
  }
}

/** A mail receiver on the loopback; `letters` grows as they come. */
export const mailReceiver = async (port = 0): Promise<{ port: number; letters: string[]; stop(): Promise<void> }> => {
  const letters: string[] = []
  const server = new SMTPServer({
    authOptional: true,
    disabledCommands: ['STARTTLS', 'AUTH'],
    onData: (stream, _, done) => {
      const chunks: Buffer[] = []
      stream.on('data', (chunk: Buffer) => chunks.push(chunk))
      stream.on('end', () => {
        letters.push(Buffer.concat(chunks).toString())
        done()
      })
    },
  })
  await new Promise<void>((resolve) => server.listen(port, '127.0.0.1', resolve))
  const stop = () => new Promise<void>((resolve) => server.close(() => resolve()))
  onTestFinished(stop)
  return { port: (server.server.address() as { port: number }).port, letters, stop }
}
