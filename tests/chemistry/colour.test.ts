import { describe, expect, test } from 'vitest'
import { ciede2000, colourWords, type Lab, transmittedColour } from '../../src/chemistry/colour.ts'
import { WHITE } from '../../src/chemistry/observer.ts'

/** One band, Gaussian in wavelength. */
const band =
  (centreNm: number, height = 1, widthNm = 70) =>
  (nm: number): number =>
    height * Math.exp(-4 * Math.LN2 * ((nm - centreNm) / widthNm) ** 2)

describe('the colour of a solution', () => {
  test('is white for a clear cell, and its white is that of D65', () => {
    // D65, 2°: x 0.3127, y 0.3290 (CIE 15); the analytic observer is good to about 1 %
    const [x, y, z] = WHITE
    expect(x / (x + y + z)).toBeCloseTo(0.3127, 2)
    expect(y / (x + y + z)).toBeCloseTo(0.329, 2)
    const clear = transmittedColour(() => 0)
    expect(clear).toMatchObject({ kind: 'colour', words: 'nearly colourless' })
    if (clear.kind === 'colour') expect(clear.lab[0]).toBeCloseTo(100, 9)
  })

  // light absorbed and colour seen, as every textbook table of complements has it (from memory)
  test.each([
    [410, /yellow/],
    [430, /yellow/],
    [455, /orange|yellow/],
    [485, /red|orange/],
    [510, /purple|red/],
    [535, /violet|purple/],
    [565, /blue|violet/],
    [600, /blue/],
    [650, /blue|green/],
    [700, /green/],
  ])('with a band at %i nm is about the complement of the light absorbed', (nm, seen) => {
    const colour = transmittedColour(band(nm))
    expect(colour.kind === 'colour' && colour.words).toMatch(seen)
  })

  // common practice: colours of well-known solutions
  test.each([
    [
      'hexaaquachromium(III), bands at 575 and 407 nm',
      (nm: number) => band(575, 0.65, 100)(nm) + band(407, 0.75, 70)(nm),
      /violet|blue|purple/,
    ],
    [
      'chloropentaamminechromium(III), bands at 512 and 375 nm',
      (nm: number) => band(512, 0.7, 90)(nm) + band(375, 0.8, 55)(nm),
      /red|pink|purple/,
    ],
    ['permanganate, bands from 525 to 545 nm', band(535, 1.2, 80), /purple|violet/],
    ['chromate, a flank that ends near 480 nm', band(373, 3, 90), /yellow/],
  ])('of %s is the one that people know', (_, curve, seen) => {
    const colour = transmittedColour(curve)
    expect(colour.kind === 'colour' && colour.words).toMatch(seen)
  })

  test('is unknown where the spectrum leaves out light that the eye sees', () => {
    expect(transmittedColour((nm) => (nm < 500 ? null : 0.1))).toEqual({
      kind: 'unknown',
      why: 'the spectrum has no value at 410 nm, and the eye sees there',
    })
    expect(transmittedColour((nm) => (nm > 700 ? null : 0.1)).kind).toBe('colour')
  })

  test('is grey where all light is held back alike, and nearly black where almost none comes through', () => {
    expect(transmittedColour(() => 0.5)).toMatchObject({ words: 'grey' })
    expect(transmittedColour(() => 3)).toMatchObject({ words: 'nearly black' })
    expect(colourWords([50, -40, 30])).toBe('green')
  })
})

// Sharma, Wu and Dalal, Color Research and Application 30 (2005) 21, test data
test.each<[Lab, Lab, number]>([
  [[50, 2.6772, -79.7751], [50, 0, -82.7485], 2.0425],
  [[50, 3.1571, -77.2803], [50, 0, -82.7485], 2.8615],
  [[50, -1.3802, -84.2814], [50, 0, -82.7485], 1.0],
  [[50, 2.5, 0], [73, 25, -18], 27.1492],
  [[50, 2.5, 0], [61, -5, 29], 22.8977],
  [[50, 2.5, 0], [56, -27, -3], 31.903],
  [[50, 2.5, 0], [58, 24, 15], 19.4535],
])('CIEDE2000 of %j and %j is the published %f, in either order', (a, b, published) => {
  expect(ciede2000(a, b)).toBeCloseTo(published, 4)
  expect(ciede2000(b, a)).toBeCloseTo(published, 4)
})
