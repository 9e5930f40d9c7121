/** Simulated spectra: the truth is known. Widths and positions as of chromium(III) in solution (common practice). */
import { describe, expect, it } from 'vitest'
import { chooseRecipe, evaluateFit, fitBands } from '../../src/bands/index.ts'
import type { Recipe } from '../../src/bands/types.ts'
import type { Spectrum } from '../../src/spectrum/types.ts'
import { curveOf, gaussianNoise, generator, simulate, type Truth } from './simulated.ts'

const chosen = (spectra: readonly Spectrum[]) => {
  const choice = chooseRecipe(spectra, {})
  if (choice.kind === 'none') throw new Error(choice.why)
  return choice
}

const fittedWith = (spectrum: Spectrum, recipe: Recipe, admissible: readonly Recipe[] = []) => {
  const fit = fitBands(spectrum, recipe, admissible)
  if (fit.kind === 'unfitted') throw new Error(fit.why)
  return fit
}

const steady: Truth = {
  bands: [
    [17400, 3600, 0.5],
    [24600, 3900, 0.6],
  ],
  constant: 0.01,
  scatter: 0.02,
}

describe('simulated spectra of two bands on constant and scatter, noise 0.001', () => {
  for (const withFlank of [false, true]) {
    it(`95 % intervals of the positions cover the truth 93 to 97 % of the time ${withFlank ? 'beside' : 'without'} a charge-transfer flank`, () => {
      const random = generator(withFlank ? 11 : 5)
      const normal = gaussianNoise(random)
      const between = (a: number, b: number) => a + (b - a) * random()
      let covered = 0
      let count = 0
      for (let i = 0; i < 260; i++) {
        const truth: Truth = {
          bands: [
            [between(16500, 19500), between(3000, 4500), between(0.3, 0.8)],
            [between(23500, 26500), between(3000, 4500), between(0.3, 0.8)],
          ],
          constant: between(-0.005, 0.02),
          scatter: between(0.005, 0.04),
          ...(withFlank ? { flank: [between(38000, 42000), between(5000, 7000), between(1, 2)] as const } : {}),
        }
        const spectrum = simulate(truth, 0.001, normal)
        const fit = fittedWith(spectrum, chosen([spectrum]).recipe)
        const bands = fit.components.filter(({ kind }) => kind === 'band')
        expect(bands).toHaveLength(2)
        bands.forEach(({ positionPerCm, uPositionPerCm }, k) => {
          const error = Math.abs(positionPerCm - truth.bands[k]![0])
          count++
          if (error < 1.96 * uPositionPerCm!) covered++
          expect(error).toBeLessThan(Math.max(60, 4 * uPositionPerCm!))
        })
      }
      expect(covered / count).toBeGreaterThan(0.93)
      expect(covered / count).toBeLessThan(0.97)
    }, 60_000)
  }

  it('a locked recipe follows a mixture from 512/375 to 480/360 nm without a jump', () => {
    const mixture = (share: number): Truth => ({
      ...steady,
      bands: [
        [1e7 / 512, 3500, 0.4 * (1 - share)],
        [1e7 / 375, 3500, 0.43 * (1 - share)],
        [1e7 / 480, 3500, 0.39 * share],
        [1e7 / 360, 3500, 0.33 * share],
      ],
    })
    const normal = gaussianNoise(generator(3))
    const { recipe } = chosen([0, 1].map(() => simulate(mixture(0), 0.001, normal, [330, 800, 1])))
    const path = Array.from({ length: 41 }, (_, k) => {
      const fit = fittedWith(simulate(mixture(k / 40), 0.001, normal, [330, 800, 1]), recipe)
      expect(fit.flags).not.toContain('not-converged')
      return fit.components.filter(({ kind }) => kind === 'band').map(({ positionPerCm }) => positionPerCm)
    })
    expect(path[0]).toHaveLength(2)
    for (const band of [0, 1]) {
      const steps = path.slice(1).map((at, k) => at[band]! - path[k]![band]!)
      for (const step of steps)
        expect(Math.abs(step - (1e7 * (band === 0 ? 1 / 480 - 1 / 512 : 1 / 360 - 1 / 375)) / 40)).toBeLessThan(45)
    }
    expect(Math.abs(path[40]![0]! - 1e7 / 480)).toBeLessThan(10)
    expect(Math.abs(path[40]![1]! - 1e7 / 360)).toBeLessThan(20)
  })

  it('a clean spectrum gives back its parameters, and the fit its curve', () => {
    const clean = simulate(steady, 0, () => 0)
    const spectrum = { ...clean, noise: clean.noise.map(() => 1e-5) }
    const { recipe } = chosen([spectrum])
    const fit = fittedWith(spectrum, recipe)
    fit.components.forEach(({ positionPerCm, widthPerCm, height, maximumPerCm }, k) => {
      expect(positionPerCm).toBeCloseTo(steady.bands[k]![0], 2)
      expect(widthPerCm).toBeCloseTo(steady.bands[k]![1], 1)
      expect(height).toBeCloseTo(steady.bands[k]![2], 6)
      expect(Math.abs(maximumPerCm! - positionPerCm)).toBeLessThan(60)
    })
    const { total } = evaluateFit(fit, spectrum.wavenumberPerCm)
    spectrum.wavenumberPerCm.forEach((x, i) => {
      expect(total[i]).toBeCloseTo(curveOf(steady)(x), 6)
    })
  })

  it('a third band that hides between the two is found', () => {
    const hidden: Truth = { ...steady, bands: [steady.bands[0]!, [20500, 2500, 0.05], steady.bands[1]!] }
    const spectrum = simulate(hidden, 0.001, gaussianNoise(generator(4)))
    const { components } = fittedWith(spectrum, chosen([spectrum]).recipe)
    expect(components).toHaveLength(3)
    components.forEach(({ positionPerCm, uPositionPerCm }, k) => {
      expect(Math.abs(positionPerCm - hidden.bands[k]![0])).toBeLessThan(4 * uPositionPerCm!)
    })
  })

  it('bands of a hundredth absorbance, and a spectrum read every 5 nm, are fitted too', () => {
    const normal = gaussianNoise(generator(6))
    const weak = { ...steady, bands: steady.bands.map(([p, w, h]) => [p, w, h / 50] as const) }
    for (const spectrum of [simulate(weak, 0.001, normal), simulate(steady, 0.001, normal, [300, 900, 5])]) {
      const { components } = fittedWith(spectrum, chosen([spectrum]).recipe)
      expect(components).toHaveLength(2)
      components.forEach(({ positionPerCm, uPositionPerCm }, k) => {
        expect(Math.abs(positionPerCm - steady.bands[k]![0])).toBeLessThan(4 * uPositionPerCm!)
      })
    }
  })

  it('where the number of bands is told, it is kept, and hints are followed', () => {
    const spectrum = simulate(steady, 0.001, gaussianNoise(generator(9)))
    const hints = steady.bands.map(([positionPerCm]) => ({ positionPerCm: positionPerCm + 300, withinPerCm: 500 }))
    for (const options of [{ bands: 2 }, { hints }]) {
      const choice = chooseRecipe([spectrum], options)
      if (choice.kind === 'none') throw new Error(choice.why)
      expect(choice.recipe.components.map(({ kind }) => kind)).toEqual(['band', 'band'])
    }
  })

  it('a recipe survives being stored as JSON', () => {
    const { recipe } = chosen([simulate(steady, 0.001, gaussianNoise(generator(2)))])
    expect(JSON.parse(JSON.stringify(recipe))).toEqual(recipe)
  })

  it('absorbance scaled scales heights and nothing else', () => {
    const spectrum = simulate(steady, 0.001, gaussianNoise(generator(8)))
    const { recipe } = chosen([spectrum])
    const once = fittedWith(spectrum, recipe)
    const thrice = fittedWith(
      { ...spectrum, absorbance: spectrum.absorbance.map((a) => 3 * a), noise: spectrum.noise.map((s) => 3 * s) },
      recipe,
    )
    once.components.forEach((component, k) => {
      expect(thrice.components[k]!.positionPerCm).toBeCloseTo(component.positionPerCm, 5)
      expect(thrice.components[k]!.uPositionPerCm).toBeCloseTo(component.uPositionPerCm!, 5)
      expect(thrice.components[k]!.height).toBeCloseTo(3 * component.height, 8)
    })
  })
})

describe('a spectrum that holds no band is never given one', () => {
  const normal = gaussianNoise(generator(21))
  const { recipe, admissible } = chosen([simulate(steady, 0.001, normal)])
  const reference = simulate(steady, 0.001, normal)
  const cases: readonly (readonly [string, Spectrum])[] = [
    ['pure noise', simulate(() => 0, 0.001, normal)],
    ['a flat line', simulate(() => 0.1, 0, normal)],
    ['noise on scatter', simulate({ bands: [], constant: 0.01, scatter: 0.05 }, 0.001, normal)],
    ['every point saturated', { ...reference, used: new Uint8Array(601) }],
    ['six points', simulate(steady, 0.001, normal, [400, 650, 50])],
    ['nothing but NaN', { ...reference, absorbance: reference.absorbance.map(() => Number.NaN) }],
    [
      'two points of one abscissa',
      { ...reference, wavenumberPerCm: reference.wavenumberPerCm.map((x, i, all) => (i === 5 ? all[4]! : x)) },
    ],
  ]
  for (const [name, spectrum] of cases)
    it(`${name}: no recipe, and unfitted under a locked one, with a reason`, () => {
      const choice = chooseRecipe([spectrum], {})
      const fit = fitBands(spectrum, recipe, admissible)
      expect(choice.kind).toBe('none')
      expect(fit.kind).toBe('unfitted')
      if (choice.kind === 'none') expect(choice.why).toMatch(/\w+.*\.$/)
      if (fit.kind === 'unfitted') expect(fit.why).toMatch(/\w+.*\.$/)
    })
})

describe('a band whose maximum lies outside the window', () => {
  it('does not move the other band, and is flagged or left to the flank', () => {
    const normal = gaussianNoise(generator(33))
    const spectrum = simulate(steady, 0.001, normal, [412, 900, 1])
    const { recipe } = chosen([spectrum])
    const fit = fittedWith(spectrum, recipe)
    const first = fit.components[0]!
    expect(Math.abs(first.positionPerCm - 17400)).toBeLessThan(Math.max(20, 4 * first.uPositionPerCm!))
    const second = fit.components[1]!
    expect(second.kind === 'flank' || fit.flags.includes('outside-window')).toBe(true)
  })
})

it('a lamp that changes at 600 nm is part of the recipe: its place found, the bands where they are', () => {
  const normal = gaussianNoise(generator(41))
  const curve = (x: number) =>
    0.5 * Math.exp(-4 * Math.LN2 * ((x - 17400) / 3600) ** 2) +
    0.45 * Math.exp(-4 * Math.LN2 * ((x - 24600) / 3900) ** 2) +
    (x < 1e7 / 600.5 ? 0.006 : 0)
  const spectra = Array.from({ length: 4 }, () => simulate(curve, 1e-3, normal))
  const choice = chooseRecipe(spectra, {})
  if (choice.kind === 'none') throw new Error(choice.why)
  expect(choice.recipe.name).toContain('+ step')
  const step = choice.recipe.background.find((term) => term.kind === 'step')
  expect(Math.abs((step?.atPerCm ?? 0) - 1e7 / 600.5)).toBeLessThan(60)
  for (const spectrum of spectra) {
    const fit = fitBands(spectrum, choice.recipe, choice.admissible)
    if (fit.kind === 'unfitted') throw new Error(fit.why)
    expect(fit.flags).toContain('lamp-step')
    expect(Math.abs(fit.components[0]!.positionPerCm - 17400)).toBeLessThan(4 * fit.components[0]!.uPositionPerCm!)
    expect(Math.abs(fit.background.step!.height + 0.006)).toBeLessThan(5 * fit.background.step!.uHeight!)
  }
})
