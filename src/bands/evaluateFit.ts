import { backgroundAt, curveOf, scatterOrigin } from './shapes.ts'
import type { BandFit } from './types.ts'

export interface CurveParts {
  /** Components (in the order of the fit) plus background, absorbance. */
  readonly total: Float64Array
  readonly components: readonly Float64Array[]
  readonly background: Float64Array
}

/** The fitted curve and its parts at the given vacuum wavenumbers, for drawings. */
export const evaluateFit = (fit: Extract<BandFit, { kind: 'fitted' }>, wavenumberPerCm: Float64Array): CurveParts => {
  const { constant, scatter, step } = fit.background
  const heights = { constant, scatter, step: step?.height ?? 0 }
  const origin = scatterOrigin(fit.recipe)
  const background = wavenumberPerCm.map((x) =>
    fit.recipe.background.reduce((sum, term) => sum + heights[term.kind] * backgroundAt(term, origin, x), 0),
  )
  const components = fit.components.map((component) => wavenumberPerCm.map(curveOf(component)))
  const total = background.map((b, i) => components.reduce((sum, part) => sum + part[i]!, b))
  return { total, components, background }
}
