import { chooseRecipe, fitBands } from '../../src/bands/index.ts'
import { type Kind, shaped, type Tally } from './shapes.ts'
import { gaussianNoise, generator } from './simulated.ts'

/** How many bands of so many spectra of a kind are found, and lie within 2 u of recipes and repeatability together. */
export const tallyOf = (kind: Kind, times: number, seed: number): Tally => {
  const random = generator(seed)
  const normal = gaussianNoise(random)
  const tally: Tally = { bands: 0, found: 0, covered: 0, unfitted: 0 }
  for (let i = 0; i < times; i++) {
    const { spectrum, bands } = shaped(kind, ((i % 3) + 1) as 1 | 2 | 3, random, normal)
    const choice = chooseRecipe([spectrum], {})
    const fit = choice.kind === 'chosen' ? fitBands(spectrum, choice.recipe, choice.admissible) : null
    tally.bands += bands.length
    if (fit?.kind !== 'fitted') {
      tally.unfitted++
      continue
    }
    for (const [position, width] of bands) {
      const miss = (p: number) => Math.abs(p - position)
      const own = fit.components
        .filter((component) => component.kind === 'band')
        .toSorted((a, b) => miss(a.positionPerCm) - miss(b.positionPerCm))[0]!
      if (miss(own.positionPerCm) > width / 2) continue
      tally.found++
      const u = Math.hypot(own.uModelPerCm ?? Number.POSITIVE_INFINITY, own.uPositionPerCm ?? 0)
      if (miss(own.positionPerCm) < Math.max(2, 2 * u)) tally.covered++
    }
  }
  return tally
}
