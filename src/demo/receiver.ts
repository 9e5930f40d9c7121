import { writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { SMTPServer } from 'smtp-server'

export interface Receiver {
  readonly port: number
  close(): Promise<void>
}

/** A mail server on the loopback that hands on what it is sent. */
export const openReceiver = async (receive: (message: string) => void): Promise<Receiver> => {
  const server = new SMTPServer({
    disabledCommands: ['STARTTLS', 'AUTH'],
    closeTimeout: 500,
    onData: (stream, _session, done) => {
      const chunks: Buffer[] = []
      stream.on('data', (chunk: Buffer) => chunks.push(chunk))
      stream.on('end', () => {
        receive(Buffer.concat(chunks).toString('utf8'))
        done(null)
      })
    },
  })
  server.on('error', () => undefined) // a line that drops is the sender's to try again
  await new Promise<void>((resolve) => {
    server.listen(0, '127.0.0.1', () => resolve())
  })
  const address = server.server.address()
  if (address === null || typeof address === 'string') throw new Error('the mail receiver has no port')
  return { port: address.port, close: () => new Promise((resolve) => server.close(() => resolve())) }
}

/** Keeps a message as a file that every mail program opens; returns its path. */
export const saveLetter = (folder: string, n: number, message: string): string => {
  const path = join(folder, `letter-${n}.eml`)
  writeFileSync(path, message)
  return path
}

/** The plain text of a message of two parts (RFC 2046), quoted-printable (RFC 2045) or base64 undone. */
export const plainTextOf = (message: string): string => {
  const boundary = /boundary="?([^";\r\n]+)"?/i.exec(message)?.[1]
  const parts = boundary === undefined ? [message] : message.split(`--${boundary}`)
  const part = parts.find((one) => /^content-type:\s*text\/plain/im.test(one)) ?? message
  const bodyAt = part.indexOf('\r\n\r\n')
  const [head, body] = [part.slice(0, bodyAt), part.slice(bodyAt + 4)]
  if (/transfer-encoding:\s*base64/i.test(head)) return Buffer.from(body, 'base64').toString('utf8')
  if (!/transfer-encoding:\s*quoted-printable/i.test(head)) return body
  const bytes = body
    .replace(/=\r\n/g, '')
    .replace(/=([0-9A-F]{2})/gi, (_, hex: string) => String.fromCharCode(Number.parseInt(hex, 16)))
  return Buffer.from(bytes, 'latin1').toString('utf8')
}
