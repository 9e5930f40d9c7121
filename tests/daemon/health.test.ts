import { get, type IncomingMessage } from 'node:http'
import { describe, expect, it } from 'vitest'
import { testRoom } from './house.ts'

const fetched = (port: number, headers: Record<string, string> = {}): Promise<{ status: number; body: string }> =>
  new Promise((resolve, reject) => {
    get({ host: '127.0.0.1', port, path: '/health', headers }, (response: IncomingMessage) => {
      let body = ''
      response.on('data', (chunk: Buffer) => {
        body += chunk.toString()
      })
      response.on('end', () => resolve({ status: response.statusCode ?? 0, body }))
    }).on('error', reject)
  })

/** A port that was free a moment ago. */
const freePort = async (): Promise<number> => {
  const { createServer } = await import('node:net')
  return new Promise((resolve) => {
    const server = createServer().listen(0, '127.0.0.1', () => {
      const { port } = server.address() as { port: number }
      server.close(() => resolve(port))
    })
  })
}

describe('health over HTTP', () => {
  it('is 200 while all is well, and knows no stranger’s host name', async () => {
    const port = await freePort()
    const room = testRoom()
    room.write(
      'tendq.yaml',
      `room: Test bench\ndata: ../var\ntimezone: Europe/Dublin\nkeeper: [ keeper@lab.example ]\nweb: { listen: "127.0.0.1:${port}" }\n`,
    )
    await room.start()
    const answer = await fetched(port)
    expect(JSON.parse(answer.body)).toMatchObject({ reasons: [], pending: 0, alarms: 0 })
    expect(answer.status).toBe(200)
    expect((await fetched(port, { Host: 'elsewhere.example' })).status).toBe(403)
  })

  it('is 503 with the reason when a drop folder is gone', async () => {
    const port = await freePort()
    const room = testRoom()
    room.write(
      'tendq.yaml',
      `room: Test bench\ndata: ../var\ntimezone: Europe/Dublin\nkeeper: [ keeper@lab.example ]\nweb: { listen: "127.0.0.1:${port}" }\n`,
    )
    const { rmSync } = await import('node:fs')
    rmSync(`${room.folder}/drop`, { recursive: true })
    await room.start()
    const { setTimeout: wait } = await import('node:timers/promises')
    for (let tries = 0; tries < 100 && (await fetched(port)).status !== 503; tries++) await wait(200)
    const answer = await fetched(port)
    expect(answer.status).toBe(503)
    expect(JSON.parse(answer.body).reasons.join()).toMatch(/drop folder of uv1/)
  })
})
