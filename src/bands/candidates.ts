/** Recipes worth trying on a window, from places where bands may be. */
import { NARROWEST_PER_CM, type Seed, WIDEST_PER_CM } from './seeds.ts'
import type { BackgroundTerm, Recipe, RecipeComponent } from './types.ts'

type Place = Pick<Seed, 'positionPerCm' | 'widthPerCm'>

/** Farthest that a band may wander from where the recipe has it; a substitution of ligands moves it less. cm⁻¹ */
const WANDER_PER_CM = 2500
/** The share of the distance to its neighbour that a band may go: once locked, bands never swap places. */
const SHARE_OF_GAP = { search: 0.8, locked: 0.45 } as const
/** A charge-transfer band beyond the window: how far off its centre may lie, where the search starts. cm⁻¹ */
const FLANK = { near: 500, start: 5000, far: 20000, narrowest: 2000, width: 6000, widest: 16000 } as const

export const BACKGROUNDS: readonly (readonly BackgroundTerm[])[] = [
  [{ kind: 'constant' }],
  [{ kind: 'constant' }, { kind: 'scatter', exponent: 4 }],
]

/** Tried with the bands that describe the spectra best: scatter of particles no longer small beside the wavelength. */
export const OTHER_BACKGROUNDS: typeof BACKGROUNDS = [[{ kind: 'constant' }, { kind: 'scatter', exponent: 2 }]]

const nameOf = (bands: number, flank: boolean, background: readonly BackgroundTerm[]): string =>
  [
    `${bands} gaussian`,
    ...(flank ? ['flank'] : []),
    ...background.map((term) =>
      term.kind === 'constant' ? 'constant' : term.exponent === 4 ? 'scatter' : `scatter^${term.exponent}`,
    ),
  ].join(' + ')

const bandComponents = (places: readonly Place[], share: number): readonly RecipeComponent[] => {
  const sorted = places.toSorted((a, b) => a.positionPerCm - b.positionPerCm)
  return sorted.map(({ positionPerCm: p, widthPerCm: w }, k) => {
    const below = k > 0 ? share * (p - sorted[k - 1]!.positionPerCm) : WANDER_PER_CM
    const above = k + 1 < sorted.length ? share * (sorted[k + 1]!.positionPerCm - p) : WANDER_PER_CM
    return {
      shape: 'gaussian',
      kind: 'band',
      positionPerCm: p,
      positionBoundsPerCm: [p - Math.min(WANDER_PER_CM, below), p + Math.min(WANDER_PER_CM, above)],
      widthPerCm: w,
      widthBoundsPerCm: [NARROWEST_PER_CM, WIDEST_PER_CM],
    }
  })
}

/** A recipe of bands at these places (start of the search, with bounds about them). */
export const makeRecipe = (
  places: readonly Place[],
  flank: Place | boolean,
  background: readonly BackgroundTerm[],
  windowPerCm: readonly [number, number],
  bounds: keyof typeof SHARE_OF_GAP,
): Recipe => {
  const edge = windowPerCm[1]
  const start = typeof flank === 'object' ? flank : { positionPerCm: edge + FLANK.start, widthPerCm: FLANK.width }
  const tail: RecipeComponent = {
    shape: 'gaussian',
    kind: 'flank',
    ...start,
    positionBoundsPerCm: [edge + FLANK.near, edge + FLANK.far],
    widthBoundsPerCm: [FLANK.narrowest, FLANK.widest],
  }
  return {
    name: nameOf(places.length, flank !== false, background),
    components: [...bandComponents(places, SHARE_OF_GAP[bounds]), ...(flank ? [tail] : [])],
    background,
    windowPerCm,
  }
}
