import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, afterEach, describe, expect, test } from 'vitest'
import { hasExpired, nextAttemptDelayMs, resolveSecret } from '../../src/mail/index.ts'

describe('a password', () => {
  const folder = mkdtempSync(join(tmpdir(), 'tendq-secret-'))
  const before = process.env.CREDENTIALS_DIRECTORY
  afterEach(() => {
    if (before === undefined) delete process.env.CREDENTIALS_DIRECTORY
    else process.env.CREDENTIALS_DIRECTORY = before
  })
  afterAll(() => rmSync(folder, { recursive: true }))

  test('comes from a systemd credential, a file or the environment, without its line end', () => {
    writeFileSync(join(folder, 'smtp-password'), 'pass word\n')
    process.env.CREDENTIALS_DIRECTORY = folder
    process.env.TENDQ_TEST_PASSWORD = 'pass word'
    expect(resolveSecret({ credential: 'smtp-password' })).toBe('pass word')
    expect(resolveSecret({ file: join(folder, 'smtp-password') })).toBe('pass word')
    expect(resolveSecret({ env: 'TENDQ_TEST_PASSWORD' })).toBe('pass word')
    delete process.env.TENDQ_TEST_PASSWORD
  })

  test('that is absent is a fault of the configuration that says what to do', () => {
    delete process.env.CREDENTIALS_DIRECTORY
    expect(() => resolveSecret({ credential: 'smtp-password' })).toThrow('LoadCredential=smtp-password:PATH')
    expect(() => resolveSecret({ env: 'TENDQ_TEST_PASSWORD' })).toThrow('is not set; set it')
    expect(() => resolveSecret({ file: join(folder, 'absent') })).toThrow('cannot be read (ENOENT)')
    writeFileSync(join(folder, 'empty'), '\n')
    expect(() => resolveSecret({ file: join(folder, 'empty') })).toThrow('is empty')
  })

  test('is looked for in the folder of credentials and nowhere else', () => {
    process.env.CREDENTIALS_DIRECTORY = join(folder, 'credentials')
    writeFileSync(join(folder, 'outside'), 'x')
    expect(() => resolveSecret({ credential: '../outside' })).toThrow('is no name of a credential')
  })
})

describe('a letter that waits', () => {
  test('is tried after 1 minute, then twice as long each time, then every hour', () => {
    expect([1, 2, 3, 4, 5, 6, 7, 8, 200].map((n) => nextAttemptDelayMs(n) / 60_000)).toEqual([
      1, 2, 4, 8, 16, 32, 60, 60, 60,
    ])
  })

  test('is given up after seven days', () => {
    const first = Date.parse('2026-03-04T09:00:00Z')
    expect(hasExpired(first, Date.parse('2026-03-11T08:59:59Z'))).toBe(false)
    expect(hasExpired(first, Date.parse('2026-03-11T09:00:00Z'))).toBe(true)
  })
})
