/** Recipes worth trying on a window, from places where bands may be. */

import { NARROWEST_PER_CM, type Seed, WIDEST_PER_CM } from './seeds.ts'
import type { Points } from './separable.ts'
import { FOUR_LN2, GAUSSIAN } from './shapes.ts'
import type { BackgroundTerm, Recipe, RecipeComponent } from './types.ts'

type Place = Pick<Seed, 'positionPerCm' | 'widthPerCm'>

/** Farthest that a band may wander from where the recipe has it; a substitution of ligands moves it less. cm⁻¹ */
const WANDER_PER_CM = 2500
/** The share of the distance to its neighbour that a band may go: once locked, bands never swap places. */
const SHARE_OF_GAP = { search: 0.8, locked: 0.45 } as const
/** A charge-transfer band beyond the window: how far off its centre may lie, where the search starts. cm⁻¹ */
const FLANK = { near: 500, close: 1500, start: 5000, far: 12000, narrowest: 2000, width: 6000, widest: 16000 } as const

export const BACKGROUNDS: readonly (readonly BackgroundTerm[])[] = [
  [{ kind: 'constant' }],
  [{ kind: 'constant' }, { kind: 'scatter', exponent: 4 }],
]

/** What the first look takes: terms that come out empty are left out again. */
export const RICH_BACKGROUND = BACKGROUNDS[1]!

/** Tried with the bands that describe the spectra best: scatter of particles no longer small beside the wavelength. */
export const OTHER_BACKGROUNDS: typeof BACKGROUNDS = [[{ kind: 'constant' }, { kind: 'scatter', exponent: 2 }]]

export const recipeName = (components: readonly RecipeComponent[], background: readonly BackgroundTerm[]): string =>
  [
    ...bandsInWords(components.filter(({ kind }) => kind === 'band')),
    ...(components.some(({ kind }) => kind === 'flank') ? ['flank'] : []),
    ...background.map((term) =>
      term.kind !== 'scatter' ? term.kind : term.exponent === 4 ? 'scatter' : `scatter^${term.exponent}`,
    ),
  ].join(' + ')

const SHAPES = ['gaussian', 'log-normal', 'pseudo-voigt', 'progression'] as const

const bandsInWords = (bands: readonly RecipeComponent[]): readonly string[] => {
  const counts = SHAPES.map((name) => ({
    name,
    count: bands.filter(({ shape, narrow }) => !narrow && shape.kind === name).length,
  }))
  const narrow = bands.filter((band) => band.narrow).length
  const words = [...counts, { name: 'narrow', count: narrow }].filter(({ count }) => count > 0)
  return words.length > 0 ? words.map(({ name, count }) => `${count} ${name}`) : ['0 gaussian']
}

const bandComponents = (places: readonly Place[], share: number): readonly RecipeComponent[] => {
  const sorted = places.toSorted((a, b) => a.positionPerCm - b.positionPerCm)
  return sorted.map(({ positionPerCm: p, widthPerCm: w }, k) => {
    const below = k > 0 ? share * (p - sorted[k - 1]!.positionPerCm) : WANDER_PER_CM
    const above = k + 1 < sorted.length ? share * (sorted[k + 1]!.positionPerCm - p) : WANDER_PER_CM
    return {
      shape: GAUSSIAN,
      kind: 'band',
      positionPerCm: p,
      positionBoundsPerCm: [p - Math.min(WANDER_PER_CM, below), p + Math.min(WANDER_PER_CM, above)],
      widthPerCm: w,
      widthBoundsPerCm: [NARROWEST_PER_CM, WIDEST_PER_CM],
    }
  })
}

/**
 * Where the search for a flank starts. Over three equal stretches at the upper end an exponential of slope b rises by a
 * ratio e^{bΔ} more each time; with the centre at the usual distance d that gives the width √(8 ln2 d/b).
 */
export const flankStart = (points: readonly Pick<Points, 'x' | 'y'>[]): Place => {
  const slopes = points.map(({ x, y }) => {
    const n = x.length
    const last = Math.max(2, Math.round(n * STRETCH))
    const mean = (a: Float64Array, k: number) => meanOf(a.subarray(n - (k + 1) * last, n - k * last))
    const ratio = (mean(y, 0) - mean(y, 1)) / (mean(y, 1) - mean(y, 2))
    return ratio > 1 ? Math.log(ratio) / ((mean(x, 0) - mean(x, 2)) / 2) : 0
  })
  const width = Math.sqrt((2 * FOUR_LN2 * FLANK.start) / Math.max(0, meanOf(Float64Array.from(slopes))))
  const edge = Math.min(...points.map(({ x }) => x.at(-1)!))
  return { positionPerCm: edge + FLANK.start, widthPerCm: Math.min(FLANK.width, Math.max(FLANK.narrowest, width)) }
}

/** Another start: a band hardly beyond the edge, steep. */
export const flankAtEdge = (windowPerCm: readonly [number, number]): Place => ({
  positionPerCm: windowPerCm[1] + FLANK.close,
  widthPerCm: FLANK.narrowest,
})

/** Share of the points in each of the stretches that tell a flank's slope. */
const STRETCH = 0.03

const meanOf = (values: Float64Array): number => values.reduce((sum, v) => sum + v, 0) / values.length

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
    shape: GAUSSIAN,
    kind: 'flank',
    ...start,
    positionBoundsPerCm: [edge + FLANK.near, edge + FLANK.far],
    widthBoundsPerCm: [FLANK.narrowest, FLANK.widest],
  }
  const components = [...bandComponents(places, SHARE_OF_GAP[bounds]), ...(flank ? [tail] : [])]
  return {
    name: recipeName(components, background),
    components,
    background,
    windowPerCm,
  }
}
