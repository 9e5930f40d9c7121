import { setFlagsFromString } from 'node:v8'
import { runInNewContext } from 'node:vm'
import { solveRecipe } from '../../src/bands/solveRecipe.ts'
import type { Recipe } from '../../src/bands/types.ts'
import { gaussianNoise, generator, simulate } from './simulated.ts'

const recipe: Recipe = {
  name: '1 gaussian + constant',
  components: [
    {
      shape: { kind: 'gaussian' },
      kind: 'band',
      positionPerCm: 17000,
      positionBoundsPerCm: [14500, 19500],
      widthPerCm: 3200,
      widthBoundsPerCm: [1200, 7000],
    },
  ],
  background: [{ kind: 'constant' }],
  windowPerCm: [11000, 25000],
}

/** Bytes that the heap and its arrays have grown by over so many fits, after a tenth of them to warm up. */
export const growthOver = (fits: number): number => {
  setFlagsFromString('--expose-gc')
  const collect = runInNewContext('gc') as () => void
  const truth = { bands: [[17400, 3600, 0.5] as const], constant: 0.01, scatter: 0 }
  const spectrum = simulate(truth, 0.001, gaussianNoise(generator(1)), [400, 900, 5])
  const points = {
    x: spectrum.wavenumberPerCm,
    y: spectrum.absorbance,
    weight: spectrum.noise.map((s) => 1 / s),
  }
  const size = () => {
    // buffers of arrays are given back by the collection after
    collect()
    collect()
    const { heapUsed, arrayBuffers } = process.memoryUsage()
    return heapUsed + arrayBuffers
  }
  const times = (count: number) => {
    for (let i = 0; i < count; i++) solveRecipe(recipe, points)
  }
  times(fits / 10)
  const before = size()
  times(fits)
  return size() - before
}
