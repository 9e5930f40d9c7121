/** Shapes other than the Gaussian, and narrow features on broad bands. Truth is known: spectra are made by formula. */
import { describe, expect, it } from 'vitest'
import { fillColumns } from '../../src/bands/columns.ts'
import { chooseRecipe, fitBands } from '../../src/bands/index.ts'
import { bandAt, curveOf, figuresOf } from '../../src/bands/shapes.ts'
import type { BandHint, BandShape, RecipeComponent } from '../../src/bands/types.ts'
import { gaussianNoise, generator, simulate } from './simulated.ts'

const SHAPES: readonly BandShape[] = [
  { kind: 'gaussian' },
  { kind: 'log-normal', skew: 0.25 },
  { kind: 'pseudo-voigt', lorentz: 0.4 },
  { kind: 'progression', quantumPerCm: 700, huangRhys: 2.5 },
]
const axis = Float64Array.from({ length: 4001 }, (_, i) => 2000 + 10 * i)

describe.each(SHAPES)('a $kind band', (shape) => {
  const component: RecipeComponent = {
    shape,
    kind: 'band',
    positionPerCm: 18000,
    positionBoundsPerCm: [0, 1e5],
    widthPerCm: 900,
    widthBoundsPerCm: [1, 1e5],
  }
  const columns = (p: number, w: number) => {
    const filled = [0, 1, 2].map(() => new Float64Array(axis.length)) as [Float64Array, Float64Array, Float64Array]
    fillColumns(component, p, w, 4e4, axis, new Float64Array(axis.length).fill(1), filled)
    return filled
  }

  it('has the value that its formula gives, and the slopes that differences of it give', () => {
    const [value, byPosition, byWidth] = columns(18000, 900)
    const step = 0.01
    for (let i = 0; i < axis.length; i += 7) {
      const at = (p: number, w: number) => bandAt(shape, p, w, axis[i]!)
      expect(Math.abs(value[i]! - at(18000, 900))).toBeLessThan(1e-13)
      const slopes = [
        (at(18000 + step, 900) - at(18000 - step, 900)) / (2 * step),
        (at(18000, 900 + step) - at(18000, 900 - step)) / (2 * step),
      ]
      expect(Math.abs(byPosition[i]! - slopes[0]!)).toBeLessThan(1e-8)
      expect(Math.abs(byWidth[i]! - slopes[1]!)).toBeLessThan(1e-8)
    }
  })

  it('is as high and as wide as it says', () => {
    const { widthPerCm, heightRatio } = figuresOf(component, 18000, 900, 4e4)
    const values = axis.map((x) => bandAt(shape, 18000, 900, x))
    const height = Math.max(...values)
    const inside = values.filter((v) => v >= height / 2).length * 10
    expect(Math.abs(height - heightRatio)).toBeLessThan(1e-3 * height)
    expect(Math.abs(inside - widthPerCm)).toBeLessThan(25)
    const drawn = curveOf({ shape, positionPerCm: 18000, widthPerCm, height: 0.5 })
    expect(Math.abs(Math.max(...axis.map(drawn)) - 0.5)).toBeLessThan(1e-3)
  })
})

it('the lines of a progression have their centre of gravity at its position, and S q² as variance (moments of Poisson’s distribution)', () => {
  const shape: BandShape = { kind: 'progression', quantumPerCm: 700, huangRhys: 2.5 }
  const values = axis.map((x) => bandAt(shape, 18000, 300, x))
  const sum = values.reduce((s, v) => s + v, 0)
  const mean = values.reduce((s, v, i) => s + v * axis[i]!, 0) / sum
  const variance = values.reduce((s, v, i) => s + v * (axis[i]! - mean) ** 2, 0) / sum
  expect(Math.abs(mean - 18000)).toBeLessThan(0.05)
  expect(Math.abs(Math.sqrt(variance) - Math.sqrt(2.5 * 700 ** 2 + 300 ** 2 / (8 * Math.LN2)))).toBeLessThan(0.5)
})

it('an asymmetry of 0 is the Gaussian, a Lorentzian share of 1 is the curve of Lorentz', () => {
  for (let x = 14000; x < 22000; x += 137) {
    const u = (x - 18000) / 3000
    expect(bandAt({ kind: 'log-normal', skew: 1e-7 }, 18000, 3000, x)).toBeCloseTo(Math.exp(-4 * Math.LN2 * u * u), 6)
    expect(bandAt({ kind: 'pseudo-voigt', lorentz: 1 }, 18000, 3000, x)).toBeCloseTo(1 / (1 + 4 * u * u), 12)
  }
})

const normal = gaussianNoise(generator(31))
const chosen = (curve: (x: number) => number, noise: number, hints: readonly BandHint[]) => {
  const spectrum = simulate(curve, noise, normal)
  const choice = chooseRecipe([spectrum], { hints })
  if (choice.kind === 'none') throw new Error(choice.why)
  const fit = fitBands(spectrum, choice.recipe, choice.admissible)
  if (fit.kind === 'unfitted') throw new Error(fit.why)
  return { fit, recipe: choice.recipe }
}

const TWO = [
  { positionPerCm: 17400, withinPerCm: 800 },
  { positionPerCm: 24600, withinPerCm: 800 },
] as const

describe('a species that names the shape of a band', () => {
  const other = (x: number) => 0.5 * bandAt({ kind: 'gaussian' }, 24600, 3900, x) + 0.01
  it.each([
    { kind: 'log-normal', skew: -0.2 },
    { kind: 'pseudo-voigt', lorentz: 0.35 },
    { kind: 'progression', quantumPerCm: 600, huangRhys: 3 },
  ] as const)('gets it fitted, with what it holds found on the reference: $kind', (shape) => {
    const line = shape.kind === 'progression' ? 500 : 3300
    const { fit, recipe } = chosen((x) => 0.4 * bandAt(shape, 17400, line, x) + other(x), 5e-4, [
      { ...TWO[0], shape: shape.kind },
      TWO[1],
    ])
    const [nu1] = fit.components
    expect(recipe.name).toContain(`1 ${shape.kind}`)
    expect(Math.abs(nu1!.positionPerCm - 17400)).toBeLessThan(30)
    const found = nu1!.shape
    if (shape.kind === 'log-normal' && found.kind === 'log-normal')
      expect(Math.abs(found.skew - shape.skew)).toBeLessThan(0.02)
    if (shape.kind === 'pseudo-voigt' && found.kind === 'pseudo-voigt')
      expect(Math.abs(found.lorentz - shape.lorentz)).toBeLessThan(0.05)
    if (shape.kind === 'progression' && found.kind === 'progression') {
      expect(Math.abs(found.quantumPerCm - 600)).toBeLessThan(5)
      expect(Math.abs(found.huangRhys - 3)).toBeLessThan(0.1)
    }
    expect(fit.reducedChi2).toBeLessThan(1.3)
  })
})

describe('a narrow feature on a broad band', () => {
  const broad = (x: number) =>
    0.4 * bandAt({ kind: 'gaussian' }, 17400, 3600, x) + 0.5 * bandAt({ kind: 'gaussian' }, 24600, 3900, x)
  const feature = (x: number) => 0.012 * bandAt({ kind: 'gaussian' }, 15150, 160, x)

  it('is found where the species names it, and leaves the broad bands where they are', () => {
    const { fit, recipe } = chosen((x) => broad(x) + feature(x), 5e-4, [
      ...TWO,
      { positionPerCm: 15200, withinPerCm: 120, narrow: true },
    ])
    expect(recipe.name).toContain('2 gaussian + 1 narrow')
    const [sf, nu1, nu2] = fit.components
    expect(Math.abs(sf!.positionPerCm - 15150)).toBeLessThan(4 * sf!.uPositionPerCm!)
    expect(Math.abs(sf!.widthPerCm - 160)).toBeLessThan(4 * sf!.uWidthPerCm!)
    expect(Math.abs(nu1!.positionPerCm - 17400)).toBeLessThan(4 * nu1!.uPositionPerCm!)
    expect(Math.abs(nu2!.positionPerCm - 24600)).toBeLessThan(4 * nu2!.uPositionPerCm!)
  })

  it('is found where nobody names it but the noise is not reached without it', () => {
    const { fit, recipe } = chosen((x) => broad(x) + feature(x), 3e-4, TWO)
    expect(recipe.name).toContain('1 narrow')
    expect(fit.components.some(({ positionPerCm }) => Math.abs(positionPerCm - 15150) < 15)).toBe(true)
    expect(fit.reducedChi2).toBeLessThan(1.3)
  })

  it('is left out where it is not there, though the species names it', () => {
    const { recipe } = chosen(broad, 5e-4, [...TWO, { positionPerCm: 15200, withinPerCm: 120, narrow: true }])
    expect(recipe.name).toBe('2 gaussian + constant')
  })

  it('that takes the whole window leaves no broad band, and that is said', () => {
    const hints = [{ positionPerCm: 20000, withinPerCm: 20000, narrow: true }]
    const choice = chooseRecipe([simulate(broad, 5e-4, normal)], { hints })
    expect(choice).toMatchObject({ kind: 'none', why: expect.stringMatching(/too few points are left/) })
  })

  it('is never made of noise', () => {
    for (let i = 0; i < 40; i++) expect(chosen(broad, 1e-3, TWO).recipe.name).not.toContain('narrow')
  })
})
