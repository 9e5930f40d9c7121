import { createTransport } from 'nodemailer'
import type { MailSettings, Secret } from '../config/types.ts'
import { FaultError } from '../fault.ts'
import { oneLine } from './plain.ts'
import type { Delivery, LetterText } from './types.ts'

export interface OutgoingLetter {
  readonly to: string
  /** `<…@…>`, the same at every attempt, so that a mailbox can fold a letter that was sent twice. */
  readonly messageId: string
  readonly inReplyTo: string | null
  readonly text: LetterText
  readonly date: Date
}

export interface Post {
  /** One attempt for one recipient; never throws for what a server or a network does. */
  send(letter: OutgoingLetter): Promise<Delivery>
  close(): void
}

export interface Patience {
  readonly connectionMs: number
  readonly greetingMs: number
  /** Silence in the middle of a conversation. */
  readonly silenceMs: number
  /** One whole attempt. */
  readonly attemptMs: number
}

const PATIENCE: Patience = { connectionMs: 10_000, greetingMs: 10_000, silenceMs: 20_000, attemptMs: 60_000 }

/** No pool: the outbox in the database is the queue, a connection is opened per letter. */
export const createPost = (
  settings: MailSettings,
  secrets: (secret: Secret) => string,
  patience: Patience = PATIENCE,
): Post => {
  let transport: ReturnType<typeof connect> | null = null
  return {
    send: async (letter) => {
      if (!isAddress(letter.to)) return { kind: 'refused', why: `${oneLine(letter.to, 80)} is no mail address` }
      try {
        transport ??= connect(settings, secrets, patience)
        await transport.sendMail({ ...messageOf(settings, letter), signal: AbortSignal.timeout(patience.attemptMs) })
        return { kind: 'sent' }
      } catch (error) {
        return deliveryOf(error)
      }
    },
    close: () => transport?.close(),
  }
}

const connect = (settings: MailSettings, secrets: (secret: Secret) => string, patience: Patience) =>
  createTransport({
    host: settings.host,
    port: settings.port,
    secure: settings.security === 'tls',
    requireTLS: settings.security === 'starttls',
    ignoreTLS: settings.security === 'none',
    ...(settings.user === null || settings.password === null
      ? {}
      : { auth: { user: settings.user, pass: secrets(settings.password) } }),
    connectionTimeout: patience.connectionMs,
    greetingTimeout: patience.greetingMs,
    socketTimeout: patience.silenceMs,
    dnsTimeout: patience.connectionMs,
    disableFileAccess: true,
    disableUrlAccess: true,
  })

/** Addresses are objects (in a string a comma adds a recipient) and go into the envelope as they stand. */
const messageOf = (settings: MailSettings, { to, messageId, inReplyTo, text, date }: OutgoingLetter) => ({
  envelope: { from: settings.from, to: [to] },
  from: { name: 'tendq', address: settings.from },
  to: { name: '', address: to },
  subject: oneLine(text.subject, 200),
  text: text.text,
  html: text.html,
  ...(text.picture === undefined ? {} : { attachments: [attached(text.picture)] }),
  messageId: oneLine(messageId),
  date,
  ...(inReplyTo === null ? {} : { inReplyTo: oneLine(inReplyTo), references: [oneLine(inReplyTo)] }),
  headers: { 'Auto-Submitted': 'auto-generated' }, // RFC 3834, 5: nobody's absence notice answers
  disableFileAccess: true,
  disableUrlAccess: true,
})

/** Shown inside the letter (RFC 2392), not beside it. */
const attached = ({ cid, png }: NonNullable<LetterText['picture']>) => ({
  cid,
  content: Buffer.from(png),
  filename: 'trend.png',
  contentType: 'image/png',
  contentDisposition: 'inline' as const,
})

/** One mailbox of RFC 5321 without quoting: nothing that could be read as two. */
const isAddress = (text: string): boolean => /^[^\s@<>()[\]\\,;:"\p{Cc}]+@[^\s@<>()[\]\\,;:"\p{Cc}]+$/u.test(text)

interface SmtpError {
  readonly message: string
  readonly code?: string
  readonly command?: string
  readonly responseCode?: number
  readonly permanent?: boolean
  readonly response?: string
}

/** Steps of a conversation in which a permanent no is meant for this recipient or this letter. */
const ABOUT_THIS_LETTER = new Set(['RCPT TO', 'DATA'])
/** RFC 4954: the server wants other credentials; RFC 5321: it closes the channel. Neither speaks of the recipient. */
const ABOUT_THE_SESSION = new Set([421, 454, 530, 534, 535, 538])

/**
 * A permanent no to this recipient or letter is a refusal. Everything else can be mended (the network, the server, the
 * password, the sender's address), so the letter waits rather than is lost.
 */
const deliveryOf = (error: unknown): Delivery => {
  if (error instanceof FaultError) return { kind: 'later', why: oneLine(error.message), unreachable: true }
  const { message, code, command, responseCode, permanent, response } = error as SmtpError
  const why = oneLine(response ?? `${message}${code === undefined ? '' : ` (${code})`}`)
  const answered = responseCode !== undefined && !ABOUT_THE_SESSION.has(responseCode)
  if (!answered || !ABOUT_THIS_LETTER.has(command ?? '')) return { kind: 'later', why, unreachable: true }
  return permanent === true ? { kind: 'refused', why } : { kind: 'later', why }
}
