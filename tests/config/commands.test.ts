import { existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { createServer } from 'node:net'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { SMTPServer } from 'smtp-server'
import { afterEach, beforeEach, describe, expect, test, vi } from 'vitest'
import { runCommandLine } from '../../src/commands/index.ts'
import { findConfigFolder } from '../../src/config/index.ts'
import { FaultError } from '../../src/fault.ts'
import { EXAMPLE, exampleWith } from './folders.ts'

const ROOM = readFileSync(join(EXAMPLE, 'tendq.yaml'), 'utf8')

let scratch: string
beforeEach(() => {
  scratch = mkdtempSync(join(tmpdir(), 'tendq-commands-'))
})
afterEach(() => {
  rmSync(scratch, { recursive: true, force: true })
  vi.unstubAllEnvs()
})

/** What a command printed, and the exit code that it set. */
const tendq = async (...args: readonly string[]) => {
  const printed = { out: '', err: '' }
  const into = (to: 'out' | 'err') => (text: string | Uint8Array) => {
    printed[to] += String(text)
    return true
  }
  const spies = [
    vi.spyOn(process.stdout, 'write').mockImplementation(into('out')),
    vi.spyOn(process.stderr, 'write').mockImplementation(into('err')),
  ]
  const before = process.exitCode
  process.exitCode = undefined
  try {
    await runCommandLine(['node', 'tendq', ...args])
    return { ...printed, code: process.exitCode ?? 0 }
  } finally {
    process.exitCode = before
    for (const spy of spies) spy.mockRestore()
  }
}

describe('tendq init', () => {
  test('writes a configuration that tendq check approves, and says what to do next', async () => {
    const folder = join(scratch, 'room/config')
    const init = await tendq('init', folder)
    expect(init.code).toBe(0)
    expect(init.out).toContain(`tendq check --config ${folder}`)
    expect((await tendq('check', '--config', folder)).code).toBe(0)
  })

  test('overwrites nothing', async () => {
    writeFileSync(join(scratch, 'tendq.yaml'), 'mine')
    const init = await tendq('init', scratch)
    expect([init.code, init.err]).toEqual([74, expect.stringContaining('nothing is overwritten')])
    expect(readFileSync(join(scratch, 'tendq.yaml'), 'utf8')).toBe('mine')
    expect(existsSync(join(scratch, 'rules'))).toBe(false)
  })
})

describe('tendq check', () => {
  test('says in words what is watched, fitted, judged and mailed', async () => {
    const { code, out, err } = await tendq('check', '--config', EXAMPLE)
    expect([code, err]).toEqual([0, ''])
    for (const words of [
      /Watched\n {2}uv1/,
      /octahedral Cr3\+: nu1 near 19526 ± 573 cm\^-1 \(512\.0 nm\)/,
      /first-band-shift \(high\)[\s\S]*rings after 2 occasions in a row/,
      /the cusum chart of delta_o/,
      /aging-40: stability@lab\.example; after 4 h unacknowledged also head@lab\.example/,
    ])
      expect(out).toMatch(words)
  })

  test('warns of what is no fault: a drop folder that is not there, no mail', async () => {
    const folder = exampleWith({ 'tendq.yaml': ROOM.replace(/mail:[\s\S]*security: none\n/, '') })
    mkdirSync(join(folder, '../drop/uv2'), { recursive: true })
    const { code, out } = await tendq('check', '--config', folder)
    expect(code).toBe(0)
    expect(out).toMatch(/uv1: the folder .* does not exist yet/)
    expect(out).not.toMatch(/uv2: the folder/)
    expect(out).toContain('no letter would go out')
  })

  test('names every fault with file, line and column and ends with 78; expressions are among them', async () => {
    const folder = exampleWith({
      'tendq.yaml': ROOM.replace('port: 25', 'port: 0'),
      'rules/room.yaml': 'rules:\n  - rule: a\n    when: nu1 > 5 h\n',
    })
    const { code, out, err } = await tendq('check', '--config', folder)
    expect([code, out]).toEqual([78, ''])
    expect(err).toMatch(
      /rules\/room\.yaml:3:\d+: .*\n.*tendq\.yaml:\d+:9: mail\.port: 0 is too small; the least is 1\n/,
    )
  })

  test('with --json prints one object a fault, or one of what it means', async () => {
    const good = JSON.parse((await tendq('check', '--json', '--config', EXAMPLE)).out)
    expect(good).toMatchObject({ room: 'North bench', sha256: expect.stringMatching(/^[0-9a-f]{64}$/) })
    const folder = exampleWith({ 'tendq.yaml': ROOM.replace('port: 25', 'port: 0').replace('\nroom:', '\nroomm:') })
    const lines = (await tendq('check', '--json', '--config', folder)).out.trim().split('\n')
    expect(lines.map((line) => JSON.parse(line).fault)).toEqual(['missing-key', 'unknown-key', 'configuration'])
  })

  test('sends a test letter through the room’s server', async () => {
    const recipients: string[] = []
    const server = new SMTPServer({
      authOptional: true,
      disabledCommands: ['AUTH', 'STARTTLS'],
      onRcptTo: ({ address }, _session, done) => {
        recipients.push(address)
        done()
      },
      onData: (stream, _session, done) => stream.on('end', done).resume(),
    })
    await new Promise<void>((ready) => server.listen(0, '127.0.0.1', ready))
    try {
      const { port } = server.server.address() as { port: number }
      const folder = exampleWith({ 'tendq.yaml': ROOM.replace('port: 25', `port: ${port}`) })
      const { code } = await tendq('check', '--config', folder, '--mail-test', 'keeper@lab.example')
      expect([code, recipients]).toEqual([0, ['keeper@lab.example']])
    } finally {
      await new Promise<void>((closed) => server.close(closed))
    }
  })

  test('ends with 74 and the reason when the letter does not go out', async () => {
    const free = createServer()
    await new Promise<void>((ready) => free.listen(0, '127.0.0.1', ready))
    const { port } = free.address() as { port: number }
    await new Promise((closed) => free.close(closed))
    const folder = exampleWith({ 'tendq.yaml': ROOM.replace('port: 25', `port: ${port}`) })
    const { code, err } = await tendq('check', '--config', folder, '--mail-test', 'keeper@lab.example')
    expect(code).toBe(74)
    expect(err).toContain(`127.0.0.1:${port}: the test letter to keeper@lab.example was `)
    expect(err).toContain('ECONNREFUSED')
  })
})

describe('the configuration folder', () => {
  test('is --config before $TENDQ_CONFIG', () => {
    vi.stubEnv('TENDQ_CONFIG', scratch)
    expect(findConfigFolder(EXAMPLE)).toBe(EXAMPLE)
    expect(findConfigFolder(undefined)).toBe(scratch)
  })

  test('is ./config without either', () => {
    vi.stubEnv('TENDQ_CONFIG', '')
    mkdirSync(join(scratch, 'config'))
    const here = vi.spyOn(process, 'cwd').mockReturnValue(scratch)
    try {
      expect(findConfigFolder(undefined)).toBe(join(scratch, 'config'))
    } finally {
      here.mockRestore()
    }
  })

  test('that is missing is told with the places where it was looked for', () => {
    const missing = join(scratch, 'nowhere')
    try {
      findConfigFolder(missing)
      expect.unreachable()
    } catch (error) {
      expect(error).toBeInstanceOf(FaultError)
      expect([(error as FaultError).exit, (error as FaultError).message]).toEqual([
        78,
        expect.stringContaining(missing),
      ])
    }
  })
})
