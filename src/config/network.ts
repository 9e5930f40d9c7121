import { isIP } from 'node:net'

/** Whether an address never leaves this machine. */
export const isLoopback = (host: string): boolean =>
  host === 'localhost' || host === '::1' || (isIP(host) === 4 && host.startsWith('127.'))

export type Listen =
  | { readonly kind: 'read'; readonly host: string; readonly port: number }
  | { readonly kind: 'refused'; readonly what: string; readonly remedy: string }

/** `127.0.0.1:8043`, `[::1]:8043`, `localhost:8043` */
export const parseListen = (text: string): Listen => {
  const found = /^(?:\[([^\]]+)\]|([^:[\]\s]+)):(\d{1,5})$/.exec(text)
  const host = found?.[1] ?? found?.[2]
  const port = Number(found?.[3])
  const known = host !== undefined && (isIP(host) !== 0 || host === 'localhost')
  if (!known || port < 1 || port > 65_535)
    return {
      kind: 'refused',
      what: `"${text}" is no address with a port`,
      remedy: 'write ADDRESS:PORT, such as 127.0.0.1:8043',
    }
  return { kind: 'read', host, port }
}
