import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { expect, onTestFinished, test } from 'vitest'
import { composeLetter, createPost } from '../../src/mail/index.ts'
import { testRoom } from '../daemon/house.ts'
import { makeCertificate } from './certificate.ts'
import { ALARM } from './facts.ts'
import { openMailbox } from './mailbox.ts'

const temporary = (): string => {
  const folder = mkdtempSync(join(tmpdir(), 'tendq-tls-'))
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }))
  return folder
}

test('a letter goes by TLS with a password to a server whose certificate is trusted, and waits before any other', async (context) => {
  const made = makeCertificate(temporary())
  if (made === null) return context.skip('openssl is not installed')
  const secure: boolean[] = []
  const box = await openMailbox({
    ...{ secure: true, key: made.key, cert: made.cert, disabledCommands: [] },
    onAuth: ({ username, password }, session, done) => {
      secure.push(session.secure)
      return username === 'tendq' && password === 'right' ? done(null, { user: username }) : done(new Error('wrong'))
    },
  })
  onTestFinished(box.close)
  const settings = {
    ...box.settings,
    security: 'tls',
    user: 'tendq',
    password: { env: 'TENDQ_TEST_PASSWORD' },
  } as const
  const post = createPost(settings, () => 'right')
  const letter = {
    ...{ to: 'keeper@lab.example', messageId: '<a.1@lab.example>', inReplyTo: null, text: composeLetter(ALARM) },
    date: new Date(),
  }
  const untrusted = await post.send(letter)
  expect(untrusted).toMatchObject({ kind: 'later', unreachable: true })
  expect(untrusted).toHaveProperty('why', expect.stringMatching(/self-signed certificate/i))
  expect(secure).toEqual([]) // no password before the certificate

  // Node reads the certificates that a machine adds to its trusted ones when it starts: a process of its own
  const room = testRoom()
  const mail = `mail: { from: tendq@lab.example, host: 127.0.0.1, port: ${settings.port}, security: tls, user: tendq, password: { env: TENDQ_TEST_PASSWORD } }`
  room.write('tendq.yaml', room.read('tendq.yaml').replace(/^mail: .*$/m, mail))
  const sent = await room.run(['check', '--mail-test', 'keeper@lab.example'], {
    NODE_EXTRA_CA_CERTS: made.certFile,
    TENDQ_TEST_PASSWORD: 'right',
  })
  expect([sent.code, sent.stderr]).toEqual([0, ''])
  expect(secure).toEqual([true])
  expect(box.received).toHaveLength(1)
})
