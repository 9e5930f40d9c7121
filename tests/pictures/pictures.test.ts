import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { chooseRecipe, fitBands } from '../../src/bands/index.ts'
import { CHLOROPENTAAMMINE, measure } from '../../src/demo/chemistry.ts'
import { ticks } from '../../src/pictures/scale.ts'
import { spectrumPicture } from '../../src/pictures/spectrum.ts'
import { trendPicture } from '../../src/pictures/trend.ts'
import { prepareSpectrum } from '../../src/spectrum/index.ts'

const curve = measure({ sample: 'X', at: 0, contents: [[CHLOROPENTAAMMINE, 0.012]] }, 3)
const prepared = prepareSpectrum(
  {
    index: 0,
    x: Float64Array.from(curve.nm),
    y: Float64Array.from(curve.absorbance),
    xUnit: 'nm',
    medium: null,
    yKind: 'absorbance',
    sample: 'X',
    title: null,
    time: null,
    pathMm: 10,
    temperatureC: null,
    concentrationMolPerL: null,
    header: {},
    warnings: [],
  },
  { medium: 'air', absorbanceLimit: 2, bandwidthNm: 1 },
)
if (prepared.kind !== 'prepared') throw new Error('the made-up spectrum could not be prepared')
const { spectrum } = prepared
const choice = chooseRecipe([spectrum], { bands: 2 })
if (choice.kind !== 'chosen') throw new Error('no recipe for the made-up spectrum')
const fit = fitBands(spectrum, choice.recipe, choice.admissible)

/** Every element closed in order, attributes quoted: what an XML parser would demand. */
const isWellFormed = (svg: string): boolean => {
  const open: string[] = []
  const rest = svg.replace(
    /<(\/?)([a-z]+)((?: [a-zA-Z][a-zA-Z0-9:-]*="[^"<]*")*)(\/?)>/g,
    (_, end, name, __, alone) => {
      if (end === '/') return open.pop() === name ? '' : '<'
      if (alone !== '/') open.push(name)
      return ''
    },
  )
  return open.length === 0 && !/[<>]|&(?!(amp|lt|gt|quot|#39);)/.test(rest)
}

/** Boxes of the upright texts, at 0.58 em a character. */
const textBoxes = (svg: string) =>
  [...svg.matchAll(/<text ([^>]*)>([^<]*)<\/text>/g)].flatMap(([, attributes, content]) => {
    const of = (name: string) => new RegExp(` ?${name}="([^"]*)"`).exec(attributes!)?.[1]
    if (of('transform') !== undefined) return []
    const size = Number(of('font-size') ?? 13)
    const width = content!.length * size * 0.58
    const anchor = of('text-anchor')
    const left = Number(of('x')) - (anchor === 'end' ? width : anchor === 'middle' ? width / 2 : 0)
    const base = Number(of('y'))
    return [{ content, left, right: left + width, top: base - 0.8 * size, bottom: base + 0.25 * size }]
  })

/** Texts that lie on each other or leave the paper. */
const clashes = (svg: string): readonly string[] => {
  const [, width, height] = /viewBox="0 0 (\d+) (\d+)"/.exec(svg)!.map(Number) as [number, number, number]
  const boxes = textBoxes(svg)
  const outside = boxes.filter((box) => box.left < 0 || box.right > width || box.top < 0 || box.bottom > height)
  const pairs = boxes.flatMap((a, i) =>
    boxes
      .slice(i + 1)
      .filter((b) => a.left < b.right && b.left < a.right && a.top < b.bottom && b.top < a.bottom)
      .map((b) => `${a.content} on ${b.content}`),
  )
  return [...outside.map(({ content }) => `${content} is outside`), ...pairs]
}

describe('a drawing of a spectrum', () => {
  const svg = spectrumPicture({ spectrum, fit, title: 'AGE-CL-1', roles: ['nu1', 'nu2'] })

  test('shows data, fit, components, background and residuals, both axes, and says so to those who cannot see it', () => {
    expect(fit.kind).toBe('fitted')
    expect(isWellFormed(svg)).toBe(true)
    for (const said of [
      'vacuum wavenumber / cm⁻¹',
      'wavelength in air / nm',
      'measured less fitted',
      'ν1 ',
      '<desc>absorbance from 14',
    ])
      expect(svg).toContain(said)
    // measured, fitted, two components, background, residuals
    expect(svg.match(/<path /g)!.length).toBeGreaterThanOrEqual(6)
    expect(svg).not.toMatch(/NaN|Infinity|undefined/)
  })

  test('has no text that lies on another or leaves the paper', () => {
    expect(clashes(svg)).toEqual([])
    const unfitted = { kind: 'unfitted', why: 'too few points', points: 3, windowPerCm: null, flags: [] } as const
    expect(clashes(spectrumPicture({ spectrum, fit: unfitted, title: 'X' }))).toEqual([])
  })

  test('is the same from run to run', () => {
    expect(spectrumPicture({ spectrum, fit, title: 'AGE-CL-1', roles: ['nu1', 'nu2'] })).toBe(svg)
  })

  test('tells its lines apart without colour: each part has a dash of its own', () => {
    const dashes = [...svg.matchAll(/<path [^>]*stroke-dasharray="([^"]+)"/g)].map(([, dash]) => dash)
    expect(new Set(dashes).size).toBe(dashes.length)
  })

  test('of a spectrum without a fit says why there is none', () => {
    const unfitted = { kind: 'unfitted', why: 'too few points', points: 3, windowPerCm: null, flags: [] } as const
    const bare = spectrumPicture({ spectrum, fit: unfitted, title: 'X' })
    expect(bare).toContain('not fitted: too few points')
    expect(isWellFormed(bare)).toBe(true)
  })

  test('shows a hostile title as text', () => {
    fc.assert(
      fc.property(fc.oneof(fc.string({ unit: 'binary' }), fc.constant('</text><script>alert(1)</script>')), (title) => {
        expect(isWellFormed(spectrumPicture({ spectrum, fit, title }))).toBe(true)
        expect(isWellFormed(trendPicture({ title, quantity: title, points: [], reference: null }))).toBe(true)
      }),
      { numRuns: 30 },
    )
  })
})

describe('a drawing of a trend', () => {
  const points = Array.from({ length: 12 }, (_, i) => ({
    at: Date.UTC(2026, 2, 2, 9) + i * 6 * 3_600_000,
    value: 19_530 + 20 * i,
    u: i === 3 ? null : 8,
    rang: i > 8,
  }))
  const svg = trendPicture({ title: 'AGE-CL-1', quantity: 'ν1 / cm⁻¹', points, reference: { value: 19_531, u: 4 } })

  test('has one mark a spectrum, another one where a rule rang, bars where an uncertainty is known, and the reference', () => {
    expect(isWellFormed(svg)).toBe(true)
    expect(svg.match(/<circle /g)).toHaveLength(9 + 1) // and the one that the key explains
    expect(svg.match(/<path [^>]*l5 5l-5 5/g)).toHaveLength(3)
    expect(svg).toContain('reference')
    expect(svg).toContain('days since 2026-03-02 09:00 UTC')
    expect(svg).toContain('the rule rang on 3 of them')
    expect(clashes(svg)).toEqual([])
    expect(svg).not.toMatch(/NaN|Infinity|undefined/)
  })

  test('of one spectrum, or of equal values, is a drawing too', () => {
    for (const few of [points.slice(0, 1), points.slice(0, 2).map((point) => ({ ...point, value: 1, u: null }))])
      expect(trendPicture({ title: 'X', quantity: 'x', points: few, reference: null })).not.toMatch(/NaN|Infinity/)
  })
})

test('an axis is marked at round values inside its range, whichever way it runs', () => {
  expect(ticks(0, 1, 5)).toEqual([0, 0.2, 0.4, 0.6, 0.8, 1])
  expect(ticks(700, 320, 4)).toEqual([400, 500, 600, 700])
  fc.assert(
    fc.property(
      fc.double({ min: -1e5, max: 1e5, noNaN: true }),
      fc.double({ min: 1e-3, max: 1e5, noNaN: true }),
      (from, span) => {
        const marks = ticks(from, from + span, 6)
        expect(marks.length).toBeGreaterThanOrEqual(3)
        expect(marks.length).toBeLessThanOrEqual(12)
        expect(marks[0]!).toBeGreaterThanOrEqual(from - 1e-6 * span)
        expect(marks.at(-1)!).toBeLessThanOrEqual(from + span * (1 + 1e-6))
      },
    ),
  )
})
