import { spawn } from 'node:child_process'
import { fileURLToPath } from 'node:url'

export type Rendering =
  | { readonly kind: 'drawn'; readonly png: Uint8Array }
  | { readonly kind: 'failed'; readonly why: string }

/** Longest time a picture may take, and how large it may become. */
const TIME_LIMIT_MS = 10_000
const LARGEST_BYTES = 4_000_000
const PNG_SIGNATURE = [0x89, 0x50, 0x4e, 0x47]

/** A drawing as PNG, twice its size in pixels. Never throws: a picture is not worth a letter. */
export const renderPng = (
  svg: string,
  {
    renderer = fileURLToPath(new URL('./render.js', import.meta.url)),
    timeLimitMs = TIME_LIMIT_MS,
  }: { renderer?: string; timeLimitMs?: number } = {},
): Promise<Rendering> =>
  new Promise((resolve) => {
    const failed = (why: string): void => resolve({ kind: 'failed', why })
    // no environment: it holds secrets that a renderer need not know
    const child = spawn(process.execPath, ['--max-old-space-size=128', renderer], {
      env: {},
      stdio: ['pipe', 'pipe', 'pipe'],
      timeout: timeLimitMs,
      killSignal: 'SIGKILL',
    })
    const chunks: Buffer[] = []
    let bytes = 0
    let said = ''
    child.stdout.on('data', (chunk: Buffer) => {
      bytes += chunk.length
      if (bytes > LARGEST_BYTES) child.kill('SIGKILL')
      else chunks.push(chunk)
    })
    child.stderr.on('data', (chunk: Buffer) => {
      said = (said + chunk.toString()).slice(0, 2000)
    })
    child.on('error', (error) => failed(error.message))
    child.stdin.on('error', () => undefined) // it ended before it had read everything; `close` tells
    child.on('close', (code, signal) => {
      const png = Buffer.concat(chunks)
      if (code === 0 && PNG_SIGNATURE.every((byte, i) => png[i] === byte)) resolve({ kind: 'drawn', png })
      else if (bytes > LARGEST_BYTES) failed('the picture became too large')
      else if (signal !== null) failed(`it took longer than ${timeLimitMs / 1000} s, or was ended by ${signal}`)
      else failed(`the renderer ended with ${code}: ${lastLine(said)}`)
    })
    child.stdin.end(svg)
  })

const lastLine = (text: string): string =>
  text
    .split('\n')
    .filter((line) => /Error|Cannot|error/.test(line))
    .at(0)
    ?.trim()
    .slice(0, 300) ?? 'it said nothing'
