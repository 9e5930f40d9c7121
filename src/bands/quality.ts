/** How good a fit is, in numbers and in one sentence. */
import type { Selection } from './points.ts'
import type { Solution } from './solveRecipe.ts'
import type { FitQuality, FittedComponent, Recipe } from './types.ts'
import { correlationTime, type Uncertainty } from './uncertainty.ts'

/** A normal deviate beyond which signs of residuals are no coin's: 1 in 10⁴. */
const RUNS_LIMIT = 3.9
/** u_model below this share of a width: the choice of the recipe hardly matters. */
const CERTAIN = 0.01

export const qualityOf = (
  recipe: Recipe,
  points: Selection,
  solution: Solution,
  uncertainty: Uncertainty | null,
  components: readonly FittedComponent[],
): FitQuality => {
  const { residuals } = solution.at
  const noise = points.noise.toSorted()[points.noise.length >> 1]!
  const highest = Math.max(0, ...components.map(({ kind, height }) => (kind === 'band' ? height : 0)))
  const runsZ = runsOf(residuals)
  return {
    signalToNoise: highest / noise,
    runsZ,
    effectivePoints: residuals.length / correlationTime(residuals),
    condition: uncertainty?.condition ?? null,
    boundsHit: boundsHit(recipe, components, uncertainty),
    lackOfFit: recipe.misfit ?? 0,
    verdict: verdictOf(recipe, solution, uncertainty, components, runsZ),
  }
}

/**
 * Wald and Wolfowitz's test of the runs of signs along the axis (NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.5.13): a normal
 * deviate, negative where signs stay alike longer than chance lets them.
 */
export const runsOf = (residuals: Float64Array): number => {
  let [positive, negative, runs] = [0, 0, 0]
  let before = 0
  for (const r of residuals) {
    if (r === 0) continue
    const sign = r > 0 ? 1 : -1
    if (sign > 0) positive++
    else negative++
    if (sign !== before) runs++
    before = sign
  }
  const n = positive + negative
  if (positive === 0 || negative === 0) return 0
  const product = 2 * positive * negative
  const variance = (product * (product - n)) / (n * n * (n - 1))
  return variance > 0 ? (runs - product / n - 1) / Math.sqrt(variance) : 0
}

const boundsHit = (
  recipe: Recipe,
  components: readonly FittedComponent[],
  uncertainty: Uncertainty | null,
): readonly string[] =>
  recipe.components.flatMap(({ kind }, k) => {
    const name = kind === 'flank' ? 'flank' : `band ${k + 1}`
    const held = (i: number) => uncertainty !== null && uncertainty.ofParameter(i, i) === null
    if (components[k] === undefined || components[k].height === 0) return [`height of ${name}`]
    return [
      ...(held(2 * k) ? [`${kind === 'flank' ? 'slope' : 'position'} of ${name}`] : []),
      ...(held(2 * k + 1) ? [`${kind === 'flank' ? 'distance' : 'width'} of ${name}`] : []),
    ]
  })

/** What a chemist wants to know first. */
const verdictOf = (
  recipe: Recipe,
  { stopped }: Solution,
  uncertainty: Uncertainty | null,
  components: readonly FittedComponent[],
  runsZ: number,
): string => {
  if (stopped === 'iterations') return 'the fit did not come to rest: do not use these numbers'
  if (uncertainty === null) return 'these bands cannot be told apart on this spectrum: do not use single positions'
  const bands = components.filter(({ kind }) => kind === 'band')
  const spread = Math.max(0, ...bands.map(({ uModelPerCm, widthPerCm }) => (uModelPerCm ?? 0) / widthPerCm))
  const absolute =
    spread < CERTAIN
      ? 'other recipes would hardly move the bands'
      : 'other recipes would move the bands by about u_model, so compare with spectra of the same recipe only'
  const misfit = recipe.misfit ?? 0
  if (misfit > 0)
    return `the curve has structure that the bands miss by ${(100 * misfit).toPrecision(2)} % of its spread; ${absolute}`
  if (runsZ < -RUNS_LIMIT)
    return `the fit is as close as the noise, but what is left is not random along the axis; ${absolute}`
  return `the fit describes the spectrum to its noise; ${absolute}`
}
