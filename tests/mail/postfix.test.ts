import { expect, onTestFinished, test } from 'vitest'
import { composeLetter, createPost } from '../../src/mail/index.ts'
import { testRoom, until } from '../daemon/house.ts'
import { ALARM } from './facts.ts'
import { headersOf, leavesOf, partOf } from './mailbox.ts'
import { startPostfix, whyNoPostfix } from './postfix.ts'

const PICTURE = {
  kind: 'drawn',
  cid: 'trend.7@tendq',
  png: new Uint8Array(5000).fill(7),
  alt: 'a trend',
  widthPx: 620,
} as const

test('Debian’s mail server takes a letter whole, a repeat with the same Message-ID, refuses a stranger for good, and is spoken to by TLS', async (context) => {
  const why = whyNoPostfix()
  if (why !== null) return context.skip(why)
  const server = await startPostfix()
  onTestFinished(server.stop)
  const settings = {
    ...{
      from: 'tendq@lab.example',
      host: '127.0.0.1',
      port: server.port,
      security: 'none',
      user: null,
      password: null,
    },
  } as const
  const post = createPost(settings, () => '')
  const letter = {
    ...{ to: 'keeper@lab.example', messageId: '<tendq.1.a@lab.example>', inReplyTo: '<tendq.0.a@lab.example>' },
    ...{ text: composeLetter(ALARM, PICTURE), date: new Date('2026-03-04T09:01:00Z') },
  }
  expect(await post.send(letter)).toEqual({ kind: 'sent' })
  expect(await post.send(letter)).toEqual({ kind: 'sent' }) // as after a crash between sending and noting it
  await until('both lie in the mailbox', () => server.mailbox().length === 2)
  const [first, second] = server.mailbox().map((message) => message.replaceAll('\n', '\r\n'))
  for (const message of [first!, second!]) expect(headersOf(message).get('message-id')).toBe(letter.messageId)
  expect(headersOf(first!).get('auto-submitted')).toBe('auto-generated')
  expect(headersOf(first!).get('in-reply-to')).toBe(letter.inReplyTo)
  expect(partOf(first!, 'text/plain')).toContain('ν1')
  expect(partOf(first!, 'text/html')).toContain('cid:trend.7@tendq')
  const picture = leavesOf(first!).find((part) => part.includes('image/png'))!
  expect(Buffer.from(picture.slice(picture.indexOf('\r\n\r\n')), 'base64')).toEqual(Buffer.from(PICTURE.png))

  expect(await post.send({ ...letter, to: 'nobody@lab.example' })).toMatchObject({
    kind: 'refused',
    why: expect.stringContaining('5.1.1'),
  })
  expect(await post.send({ ...letter, to: 'someone@elsewhere.example' })).toMatchObject({
    kind: 'refused',
    why: expect.stringContaining('5.7.1'),
  })

  if (server.certificate === null) return
  const untrusted = await createPost({ ...settings, security: 'starttls' }, () => '').send(letter)
  expect(untrusted).toMatchObject({ kind: 'later', unreachable: true })
  const room = testRoom(server.port)
  room.write('tendq.yaml', room.read('tendq.yaml').replace('security: none', 'security: starttls'))
  const sent = await room.run(['check', '--mail-test', 'keeper@lab.example'], {
    NODE_EXTRA_CA_CERTS: server.certificate.certFile,
  })
  expect([sent.code, sent.stderr]).toEqual([0, ''])
  await until('the test letter lies in the mailbox', () => server.mailbox().length === 3)
  expect(server.mailbox()[2]).toContain('with ESMTPS ') // RFC 3848: over TLS
}, 60_000)
