/** Coverage of the intervals over 2,000 simulated spectra of many kinds (noise, window, step, background, flank); the truth is known. */
import { expect, it } from 'vitest'
import { chooseRecipe, fitBands } from '../../src/bands/index.ts'
import { efficiencyOver } from '../bands/efficiency.ts'
import { growthOver } from '../bands/memory.ts'
import { gaussianNoise, generator, simulate, type Truth } from '../bands/simulated.ts'

const COUNT = 2000

it('over 2,000 spectra the 95 % intervals of the positions cover the truth 93 to 97 % of the time, none is far off without a flag', () => {
  const random = generator(2024)
  const normal = gaussianNoise(random)
  const between = (a: number, b: number) => a + (b - a) * random()
  let covered = 0
  let count = 0
  let unlike = 0
  const far: number[] = []
  for (let i = 0; i < COUNT; i++) {
    const kind = i % 4
    const truth: Truth = {
      bands: [
        [between(16500, 19500), between(3000, 4500), between(0.2, 0.9)],
        [between(23500, 26500), between(3000, 4500), between(0.2, 0.9)],
      ],
      constant: between(-0.01, 0.03),
      scatter: kind === 0 ? 0 : between(0.002, 0.05),
      ...(kind === 3 ? { flank: [between(37000, 42000), between(5000, 8000), between(0.5, 2)] as const } : {}),
    }
    const noise = 10 ** between(-3.7, -2.5)
    const step = [0.5, 1, 2][i % 3]!
    const spectrum = simulate(truth, noise, normal, [between(300, 330), between(800, 950), step])
    const choice = chooseRecipe([spectrum], {})
    const fit = choice.kind === 'chosen' ? fitBands(spectrum, choice.recipe, choice.admissible) : null
    const bands = fit?.kind === 'fitted' ? fit.components.filter(({ kind: k }) => k === 'band') : []
    if (bands.length !== 2) {
      unlike++
      continue
    }
    bands.forEach(({ positionPerCm, uPositionPerCm }, k) => {
      const error = Math.abs(positionPerCm - truth.bands[k]![0])
      count++
      if (error < 1.96 * uPositionPerCm!) covered++
      if (error > Math.max(60, 4 * uPositionPerCm!)) far.push(i)
    })
  }
  console.log({ spectra: COUNT, otherNumberOfBands: unlike, coverage: covered / count, far })
  expect(unlike).toBeLessThan(COUNT / 100)
  expect(far).toEqual([])
  expect(covered / count).toBeGreaterThan(0.93)
  expect(covered / count).toBeLessThan(0.97)
})

it('over 2,000 spectra of two bands Δo and B are covered 93 to 97 % of the time, at the Cramér–Rao bound', () => {
  const found = efficiencyOver(2000, 405)
  console.log(found)
  expect(found.unlike).toBeLessThan(20)
  expect(Math.abs(found.efficiency - 1)).toBeLessThan(0.15)
  for (const share of [found.deltaCovered, found.bCovered]) {
    expect(share).toBeGreaterThan(0.93)
    expect(share).toBeLessThan(0.97)
  }
})

it('memory stays flat over 100,000 fits', () => {
  expect(growthOver(100_000)).toBeLessThan(8e6)
})
