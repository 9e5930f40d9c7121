import { SMTPServer, type SMTPServerOptions } from 'smtp-server'
import type { MailSettings } from '../../src/config/types.ts'

export interface Received {
  readonly from: string
  readonly to: readonly string[]
  readonly raw: string
}

/** A real mail server on the loopback that keeps what it is sent. */
export const openMailbox = async (options: SMTPServerOptions = {}) => {
  const received: Received[] = []
  const server = new SMTPServer({
    disabledCommands: ['STARTTLS', 'AUTH'],
    closeTimeout: 100,
    onData: (stream, session, done) => {
      const chunks: Buffer[] = []
      stream.on('data', (chunk: Buffer) => chunks.push(chunk))
      stream.on('end', () => {
        const { mailFrom, rcptTo } = session.envelope
        received.push({
          from: mailFrom === false ? '' : mailFrom.address,
          to: rcptTo.map(({ address }) => address),
          raw: Buffer.concat(chunks).toString('utf8'),
        })
        done(null)
      })
    },
    ...options,
  })
  server.on('error', () => {}) // dropped connections are what some tests are about
  await new Promise<void>((resolve) => {
    server.listen(0, '127.0.0.1', () => resolve())
  })
  const port = (server.server.address() as { port: number }).port
  const settings: MailSettings = {
    from: 'tendq@lab.example',
    host: '127.0.0.1',
    port,
    security: 'none',
    user: null,
    password: null,
  }
  return { received, settings, close: () => new Promise<void>((resolve) => server.close(() => resolve())) }
}

/** Header fields, unfolded (RFC 5322, 2.2.3), of the first header block. */
export const headersOf = (raw: string): ReadonlyMap<string, string> => {
  const block = raw.slice(0, raw.indexOf('\r\n\r\n')).replace(/\r\n[ \t]+/g, ' ')
  return new Map(
    block.split('\r\n').map((line) => {
      const colon = line.indexOf(':')
      return [line.slice(0, colon).toLowerCase(), line.slice(colon + 1).trim()]
    }),
  )
}

/** The parts of a message that are no parts themselves, header and body. */
export const leavesOf = (raw: string): readonly string[] => {
  const boundary = /^multipart\/.*boundary="?([^";]+)"?/.exec(headersOf(raw).get('content-type') ?? '')?.[1]
  if (boundary === undefined) return [raw]
  return raw
    .split(`--${boundary}`)
    .slice(1, -1)
    .flatMap((part) => leavesOf(part.replace(/^\r\n/, '')))
}

/** Body of the first part of that type, its transfer encoding undone. */
export const partOf = (raw: string, type: string): string => {
  const part = leavesOf(raw).find((one) => headersOf(one).get('content-type')?.startsWith(type))
  if (part === undefined) throw new Error(`no part ${type}`)
  const body = part.slice(part.indexOf('\r\n\r\n') + 4)
  const encoding = headersOf(part).get('content-transfer-encoding')
  if (encoding === 'base64') return Buffer.from(body, 'base64').toString('utf8')
  if (encoding !== 'quoted-printable') return body
  const octets = body
    .replace(/=\r\n/g, '')
    .replace(/=([0-9A-F]{2})/g, (_, hex: string) => String.fromCharCode(Number.parseInt(hex, 16)))
  return Buffer.from(octets, 'latin1').toString('utf8')
}

/** An RFC 2047 header in words. */
export const decodeHeader = (text: string): string =>
  text.replace(/\?=\s+=\?/g, '?==?').replace(/=\?utf-8\?([QB])\?([^?]*)\?=/gi, (_, how: string, coded: string) => {
    const octets =
      how.toUpperCase() === 'B'
        ? Buffer.from(coded, 'base64')
        : Buffer.from(
            coded
              .replaceAll('_', ' ')
              .replace(/=([0-9A-F]{2})/gi, (__, hex: string) => String.fromCharCode(Number.parseInt(hex, 16))),
            'latin1',
          )
    return octets.toString('utf8')
  })
