import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { inflateSync } from 'node:zlib'
import { describe, expect, onTestFinished, test } from 'vitest'
import { renderPng } from '../../src/pictures/png.ts'
import { drawTrend } from '../../src/pictures/trend.ts'

const RENDERER = fileURLToPath(new URL('../../dist/pictures/render.js', import.meta.url))

/** Width and height of the header chunk, and the pixel data still filtered (PNG specification, third edition, 11.2). */
const readPng = (png: Uint8Array) => {
  const bytes = Buffer.from(png)
  const data: Buffer[] = []
  for (let at = 8; at < bytes.length; ) {
    const length = bytes.readUInt32BE(at)
    if (bytes.toString('latin1', at + 4, at + 8) === 'IDAT') data.push(bytes.subarray(at + 8, at + 8 + length))
    at += 12 + length
  }
  return { width: bytes.readUInt32BE(16), height: bytes.readUInt32BE(20), pixels: inflateSync(Buffer.concat(data)) }
}

const { svg } = drawTrend({
  title: 'AGE40-1 – Δo β ν₁ “né”',
  quantity: 'ν1 / cm⁻¹',
  points: [19_531, 19_534, 19_640].map((value, i) => ({ at: i * 3_600_000, value, u: 4, rang: i === 2 })),
  reference: { value: 19_531, u: 3 },
  limits: [19_471, 19_591],
})

/** A renderer that misbehaves. */
const rendererOf = (code: string): string => {
  const folder = mkdtempSync(join(tmpdir(), 'tendq-renderer-'))
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }))
  const file = join(folder, 'render.mjs')
  writeFileSync(file, code)
  return file
}

describe('a picture of the trend', () => {
  test('is drawn twice its size, with its writing by a font that comes along', async () => {
    const [whole, unwritten] = await Promise.all([
      renderPng(svg, { renderer: RENDERER }),
      renderPng(svg.replace(/<text [^>]*>[^<]*<\/text>/g, ''), { renderer: RENDERER }),
    ])
    if (whole.kind === 'failed' || unwritten.kind === 'failed') throw new Error(JSON.stringify([whole, unwritten]))
    const picture = readPng(whole.png)
    expect([picture.width, picture.height]).toEqual([1240, 544])
    // writing that vanished for want of a font would leave the same pixels
    expect(picture.pixels.equals(readPng(unwritten.png).pixels)).toBe(false)
  })

  test('fails in words where the renderer crashes, hangs, or says something else', async () => {
    const ends = await Promise.all(
      ['throw new Error("no font")', 'setInterval(() => {}, 1000)', 'process.stdout.write("text")'].map((code) =>
        renderPng(svg, { renderer: rendererOf(code), timeLimitMs: 2000 }),
      ),
    )
    expect(ends.map((end) => (end.kind === 'failed' ? end.why : 'drawn'))).toEqual([
      expect.stringContaining('no font'),
      expect.stringContaining('longer than 2 s'),
      expect.stringContaining('ended with 0'),
    ])
    expect((await renderPng('no drawing', { renderer: RENDERER })).kind).toBe('failed')
  })

  test('puts the names of lines that lie close together below each other', () => {
    const close = drawTrend({
      title: 'X',
      quantity: 'x',
      points: [0, 1].map((at) => ({ at, value: 100, u: 0.1, rang: false })),
      reference: { value: 100, u: 0.1 },
      limits: [99.9, 100.1, 200],
    }).svg
    const places = [...close.matchAll(/<text x="532" y="([\d.]+)"/g)].map(([, y]) => Number(y))
    expect(places).toHaveLength(5)
    for (let i = 1; i < places.length; i++) expect(places[i]! - places[i - 1]!).toBeGreaterThanOrEqual(13.9)
    expect(Math.max(...places)).toBeLessThan(272)
  })
})
