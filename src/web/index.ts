import { createHash, timingSafeEqual } from 'node:crypto'
import Fastify from 'fastify'
import type { Logger } from 'pino'
import type { WebSettings } from '../config/types.ts'
import { healthOf } from '../daemon/health.ts'
import { resolveSecret } from '../mail/index.ts'
import { openStoreReadOnly } from '../store/index.ts'

/**
 * Serves `/health` (JSON; 503 when degraded) on the configured address. It has a read-only connection of its own:
 * a page request can never hold up or change what the daemon stores. Returns the stop.
 */
export const startWeb = async (
  settings: WebSettings,
  dataFolder: string,
  log: Logger,
): Promise<() => Promise<void>> => {
  const db = openStoreReadOnly(dataFolder)
  const app = Fastify({
    forceCloseConnections: true,
    keepAliveTimeout: 2_000,
    requestTimeout: 10_000,
    bodyLimit: 1_024,
  })
  const token = settings.token === null ? null : resolveSecret(settings.token)
  app.addHook('onRequest', async (request, reply) => {
    // a name that resolves to this machine would let another site's page read ours
    if (!isOwnHost(request.host, settings)) return reply.code(403).send({ error: 'unknown host name' })
    if (token !== null && !isBearer(request.headers.authorization, token))
      return reply.code(401).header('WWW-Authenticate', 'Bearer').send({ error: 'a token is needed' })
  })
  app.get('/health', async (_, reply) => {
    const health = healthOf(db, dataFolder, Date.now())
    await reply
      .code(health.reasons.length === 0 ? 200 : 503)
      .header('Cache-Control', 'no-store')
      .header('X-Content-Type-Options', 'nosniff')
      .send(health)
  })
  await app.listen({ host: settings.host, port: settings.port })
  log.info({ host: settings.host, port: settings.port }, 'health is served')
  return async () => {
    await app.close()
    db.close()
  }
}

/** Compares hashes, so that the time it takes tells nothing of the token. */
const isBearer = (header: string | undefined, token: string): boolean =>
  timingSafeEqual(sha256(header ?? ''), sha256(`Bearer ${token}`))

const sha256 = (text: string): Buffer => createHash('sha256').update(text).digest()

const isOwnHost = (host: string, { host: own, port }: WebSettings): boolean =>
  ['127.0.0.1', 'localhost', '[::1]', own].some((name) => host === name || host === `${name}:${port}`)
