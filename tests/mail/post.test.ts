import { createServer } from 'node:net'
import { afterEach, describe, expect, test } from 'vitest'
import type { Secret } from '../../src/config/types.ts'
import { composeLetter, createPost, resolveSecret, sendTestLetter } from '../../src/mail/index.ts'
import { ALARM } from './facts.ts'
import { decodeHeader, headersOf, openMailbox, partOf } from './mailbox.ts'

const closers: (() => Promise<void> | void)[] = []
afterEach(async () => {
  for (const close of closers.splice(0)) await close()
})

const mailbox = async (options: Parameters<typeof openMailbox>[0] = {}) => {
  const box = await openMailbox(options)
  closers.push(box.close)
  return box
}

const noSecrets = (): string => {
  throw new Error('no secret is asked for')
}
const PATIENCE = { connectionMs: 500, greetingMs: 500, silenceMs: 500, attemptMs: 1500 }
const LETTER = {
  to: 'stability@lab.example',
  messageId: '<alarm-7.1.abc@lab.example>',
  inReplyTo: null,
  text: composeLetter(ALARM),
  date: new Date('2026-03-04T09:01:00Z'),
}
const answer = (code: number, message: string) => Object.assign(new Error(message), { responseCode: code })

describe('a letter on its way', () => {
  test('arrives with its Message-ID, date, subject, both bodies and the mark of an automatic message', async () => {
    const { received, settings } = await mailbox()
    const post = createPost(settings, noSecrets)
    expect(await post.send(LETTER)).toEqual({ kind: 'sent' })
    post.close()
    const { raw, from, to } = received[0]!
    const headers = headersOf(raw)
    expect({ from, to }).toEqual({ from: 'tendq@lab.example', to: ['stability@lab.example'] })
    expect(headers.get('message-id')).toBe(LETTER.messageId)
    expect(new Date(headers.get('date')!)).toEqual(LETTER.date)
    expect(headers.get('auto-submitted')).toBe('auto-generated') // RFC 3834, section 5
    expect(decodeHeader(headers.get('subject')!)).toBe(LETTER.text.subject)
    expect(partOf(raw, 'text/plain').replaceAll('\r\n', '\n').trim()).toBe(LETTER.text.text.trim())
    expect(partOf(raw, 'text/html').replaceAll('\r\n', '\n').trim()).toBe(LETTER.text.html.trim())
  })

  test('joins the thread of the alarm', async () => {
    const { received, settings } = await mailbox()
    await createPost(settings, noSecrets).send({ ...LETTER, inReplyTo: '<first@lab.example>' })
    const headers = headersOf(received[0]!.raw)
    expect(headers.get('in-reply-to')).toBe('<first@lab.example>')
    expect(headers.get('references')).toBe('<first@lab.example>')
  })

  test('carries the same Message-ID when it is sent again', async () => {
    const { received, settings } = await mailbox()
    const post = createPost(settings, noSecrets)
    await post.send(LETTER)
    await post.send(LETTER)
    expect(received.map(({ raw }) => headersOf(raw).get('message-id'))).toEqual([LETTER.messageId, LETTER.messageId])
  })

  test('takes no second recipient and no header from what it is told', async () => {
    const { received, settings } = await mailbox()
    const post = createPost(settings, noSecrets)
    for (const to of [
      'a@lab.example, b@lab.example',
      'a@lab.example\r\nBcc: b@lab.example',
      'A <a@lab.example>',
      '',
      'a',
    ])
      expect((await post.send({ ...LETTER, to })).kind).toBe('refused')
    expect(received).toEqual([])
    const text = composeLetter({ ...ALARM, subject: 'A\r\nBcc: b@lab.example\r\n\r\nbody' })
    await post.send({ ...LETTER, text: { ...text, subject: `${text.subject}\r\nBcc: b@lab.example` } })
    expect(received[0]!.to).toEqual([LETTER.to])
    expect([...headersOf(received[0]!.raw).keys()].sort()).toEqual(
      ['auto-submitted', 'content-type', 'date', 'from', 'message-id', 'mime-version', 'subject', 'to'].sort(),
    )
  })
})

describe('a letter that does not get through', () => {
  const outcome = async (options: Parameters<typeof openMailbox>[0]) => {
    const { settings } = await mailbox(options)
    return createPost(settings, noSecrets, PATIENCE).send(LETTER)
  }

  test('is refused where the server says a permanent no to the recipient or the letter (RFC 5321, 4.2.1)', async () => {
    expect(await outcome({ onRcptTo: (_a, _s, done) => done(answer(550, 'no such mailbox')) })).toEqual({
      kind: 'refused',
      why: '550 no such mailbox',
    })
    const tooBig = await outcome({
      onData: (stream, _s, done) => {
        stream.resume()
        stream.on('end', () => done(answer(554, 'not wanted')))
      },
    })
    expect(tooBig).toEqual({ kind: 'refused', why: '554 not wanted' })
  })

  test('waits where the no is for now', async () => {
    expect(await outcome({ onRcptTo: (_a, _s, done) => done(answer(450, 'mailbox busy')) })).toEqual({
      kind: 'later',
      why: '450 mailbox busy',
    })
  })

  test('waits, and the others with it, where the server or the settings are at fault', async () => {
    const sender = await outcome({ onMailFrom: (_a, _s, done) => done(answer(550, 'sender not known')) })
    expect(sender).toMatchObject({ kind: 'later', unreachable: true })
    const greeting = await outcome({ onConnect: (_s, done) => done(answer(554, 'go away')) })
    expect(greeting).toMatchObject({ kind: 'later', unreachable: true })
  })

  test('waits where nobody listens', async () => {
    const { settings, close } = await openMailbox()
    await close()
    expect(await createPost(settings, noSecrets, PATIENCE).send(LETTER)).toMatchObject({
      kind: 'later',
      unreachable: true,
    })
  })

  test('waits where the line is dropped in the middle', async () => {
    const cut = await outcome({
      onData: (stream, _session) => {
        stream.once('data', () => stream.destroy())
      },
    })
    expect(cut).toMatchObject({ kind: 'later', unreachable: true })
    const server = createServer((socket) => {
      socket.on('error', () => {})
      socket.write('220 lab.example ESMTP\r\n')
      socket.once('data', () => socket.destroy())
    })
    await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', () => resolve()))
    closers.push(() => new Promise<void>((resolve) => server.close(() => resolve())))
    const { settings } = await mailbox()
    const { port } = server.address() as { port: number }
    expect(await createPost({ ...settings, port }, noSecrets, PATIENCE).send(LETTER)).toMatchObject({
      kind: 'later',
      unreachable: true,
    })
  })

  test('waits for a server that is too slow no longer than the attempt may last', async () => {
    const began = Date.now()
    const slow = await outcome({ onRcptTo: (_a, _s, done) => void setTimeout(() => done(null), 3000) })
    expect(slow).toMatchObject({ kind: 'later', unreachable: true })
    expect(Date.now() - began).toBeLessThan(2500)
  })

  test('waits where the password is wrong: nobody loses a letter by a typing error', async () => {
    const { settings, received } = await mailbox({
      disabledCommands: ['STARTTLS'],
      allowInsecureAuth: true,
      onAuth: ({ username, password }, _s, done) =>
        username === 'tendq' && password === 'right' ? done(null, { user: username }) : done(new Error('wrong')),
    })
    const password: Secret = { env: 'UNUSED' }
    const withUser = { ...settings, user: 'tendq', password }
    expect(await createPost(withUser, () => 'wrong', PATIENCE).send(LETTER)).toMatchObject({
      kind: 'later',
      unreachable: true,
    })
    expect(await createPost(withUser, () => 'right', PATIENCE).send(LETTER)).toEqual({ kind: 'sent' })
    expect(received).toHaveLength(1)
  })

  test('waits where the password cannot be had', async () => {
    const { settings } = await mailbox()
    const withUser = { ...settings, user: 'tendq', password: { env: 'TENDQ_TEST_ABSENT' } }
    const outcome = await createPost(withUser, resolveSecret, PATIENCE).send(LETTER)
    expect(outcome).toMatchObject({ kind: 'later', unreachable: true })
    expect(outcome).toHaveProperty('why', expect.stringContaining('TENDQ_TEST_ABSENT: is not set'))
  })

  test('does not go out in the clear where starttls is asked for and the server has none', async () => {
    const { settings, received } = await mailbox()
    expect(await createPost({ ...settings, security: 'starttls' }, noSecrets, PATIENCE).send(LETTER)).toMatchObject({
      kind: 'later',
    })
    expect(received).toEqual([])
  })
})

test('a test letter goes out at once, and says what it is', async () => {
  const { received, settings } = await mailbox()
  const config = { mail: settings, room: 'North bench', timeZone: 'Europe/Dublin' } as Parameters<
    typeof sendTestLetter
  >[0]
  expect(await sendTestLetter(config, 'keeper@lab.example')).toEqual({ kind: 'sent' })
  expect(partOf(received[0]!.raw, 'text/plain')).toContain('test letter from the room North bench')
  await expect(sendTestLetter({ ...config, mail: null }, 'keeper@lab.example')).rejects.toThrow('no mail server')
})
