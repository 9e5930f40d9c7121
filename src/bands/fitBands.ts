/** One spectrum under one recipe: bands with their uncertainties, or why there are none. */
import type { Flag, Spectrum } from '../spectrum/types.ts'
import { type CurveMaximum, curveMaximum } from './maxima.ts'
import { modelSpreads } from './modelSpread.ts'
import { disorder, reweigh, type Selection, selectPoints, usedWindow } from './points.ts'
import { qualityOf } from './quality.ts'
import { figuresOf } from './shapes.ts'
import { type Solution, solveRecipe } from './solveRecipe.ts'
import { rmsOf, standing } from './standing.ts'
import type { BackgroundTerm, BandFit, FitBands, FittedBackground, FittedComponent, Recipe } from './types.ts'
import { repeatabilityOf, type Uncertainty, uncertaintyOf } from './uncertainty.ts'

/** χ²/n over noise and the recipe's misfit from which the recipe is said not to describe the spectrum. */
const MISFIT_LIMIT = 6
/** Standard uncertainties from which a step where the lamp changes is there. */
const STEP_LIMIT = 4

const unfitted = (
  spectrum: Spectrum,
  why: string,
  points: number,
  ...flags: Flag[]
): Extract<BandFit, { kind: 'unfitted' }> => ({
  kind: 'unfitted',
  why,
  points,
  windowPerCm: disorder(spectrum) === null ? usedWindow(spectrum) : null,
  flags: [...new Set([...spectrum.flags, ...flags])],
})

/**
 * Fits the recipe, then the other admissible recipes for the model uncertainty. `uModelPerCm` is null where none is given.
 * Outcome `unfitted` where the spectrum is in disorder, has too few points, or no band stands above its noise.
 */
export const fitBands: FitBands = (spectrum, recipe, admissible) => {
  const look = lookAt(spectrum, recipe)
  return look.kind === 'unfitted' ? look : fitted(spectrum, recipe, admissible, look)
}

/** Whether the recipe shows any band in the spectrum, without what takes longer to say of it. */
export const showsBand = (spectrum: Spectrum, recipe: Recipe): boolean => lookAt(spectrum, recipe).kind === 'solved'

/** The recipe's components alone, in its order: all that an assignment asks for; null where the recipe shows no band. */
export const componentsOf = (spectrum: Spectrum, recipe: Recipe): readonly FittedComponent[] | null => {
  const look = lookAt(spectrum, recipe)
  if (look.kind === 'unfitted') return null
  return recipe.components.map((_, k) => componentOf(recipe, look.solution, look.uncertainty, k))
}

interface Solved {
  readonly kind: 'solved'
  readonly points: Selection
  readonly solution: Solution
  readonly uncertainty: Uncertainty | null
  /** Which components stand above the noise. */
  readonly present: readonly boolean[]
}

const lookAt = (spectrum: Spectrum, recipe: Recipe): Solved | Extract<BandFit, { kind: 'unfitted' }> => {
  const fault = disorder(spectrum)
  if (fault !== null) return unfitted(spectrum, `The spectrum can't be fitted: ${fault}.`, 0)
  const points = selectPoints(spectrum, recipe.windowPerCm, recipe.misfit ?? 0)
  const parameters = 3 * recipe.components.length + recipe.background.length
  const count = points.x.length
  if (count === 0) return unfitted(spectrum, 'No point of the recipe’s window can be used.', 0, 'too-few-points')
  if (count <= parameters + 2)
    return unfitted(spectrum, `${count} points can't tell ${parameters} parameters.`, count, 'too-few-points')
  if (!(points.spread > 0)) return unfitted(spectrum, 'The curve is a flat line.', count, 'no-band')
  const solution = solveRecipe(recipe, points)
  if (!solution) return unfitted(spectrum, 'The recipe can’t be evaluated on this spectrum.', count, 'not-converged')
  const uncertainty = repeatabilityOf(recipe, solution, points)
  const present = standing(recipe, solution, points, uncertainty)
  if (!recipe.components.some(({ kind }, k) => kind === 'band' && present[k]))
    return unfitted(spectrum, 'No band stands above the noise.', count, 'no-band')
  return { kind: 'solved', points, solution, uncertainty, present }
}

const fitted = (
  spectrum: Spectrum,
  recipe: Recipe,
  admissible: readonly Recipe[],
  { points, solution, uncertainty, present }: Solved,
): BandFit => {
  const spreads = modelSpreads(recipe, admissible, points)
  const bare = recipe.components.map((_, k) => componentOf(recipe, solution, uncertainty, k))
  const maxima = curveMaxima(points, bare)
  const structure = structureOf(recipe, solution, uncertainty)
  const missed = (k: number): number => maximumMissed(points, solution, bare[k]!, maxima[k] ?? null)
  const all = bare.map((component, k) => ({
    ...component,
    uModelPerCm: spreads[k] === null ? null : Math.hypot(Math.max(spreads[k]!, missed(k)), structure[k]!),
    maximumPerCm: maxima[k]?.positionPerCm ?? null,
    uMaximumPerCm: maxima[k]?.uPositionPerCm ?? null,
  }))
  const order = all.map((_, k) => k).sort((a, b) => all[a]!.positionPerCm - all[b]!.positionPerCm)
  const n = points.x.length
  const overNoise = solution.at.residuals.reduce(
    (sum, r, i) => sum + (r / points.weight[i]! / points.noise[i]!) ** 2,
    0,
  )
  const background = backgroundOf(recipe, solution, uncertainty)
  const freedom = Math.max(1, n - (uncertainty?.fitted ?? 3 * all.length))
  return {
    kind: 'fitted',
    recipe,
    components: order.map((k) => all[k]!),
    positionCovariance:
      uncertainty && order.map((k) => order.map((l) => positionCovariance(recipe, solution, uncertainty, k, l) ?? 0)),
    background,
    rms: rmsOf(solution, points),
    noise: points.noise.toSorted()[n >> 1]!,
    reducedChi2: overNoise / freedom,
    quality: qualityOf(recipe, points, solution, uncertainty, all),
    points: n,
    windowPerCm: [points.x[0]!, points.x[n - 1]!],
    iterations: solution.iterations,
    stopped: solution.stopped,
    flags: [
      ...new Set([
        ...spectrum.flags,
        ...flagsOf(recipe, points, solution, uncertainty, present),
        ...stepFlag(background),
      ]),
    ],
  }
}

/** Derivatives of a component's centre by its two search parameters. */
const centreSlopes = (kind: FittedComponent['kind'], second: number): readonly [number, number] =>
  kind === 'band' ? [1, 0] : [0, -1 / second ** 2]

const positionCovariance = (
  recipe: Recipe,
  { parameters }: Solution,
  uncertainty: Uncertainty,
  k: number,
  l: number,
): number | null => {
  const slopes = (i: number) => centreSlopes(recipe.components[i]!.kind, parameters[2 * i + 1]!)
  const own = slopes(k)
  const other = slopes(l)
  let sum = 0
  for (const i of [0, 1] as const)
    for (const j of [0, 1] as const) {
      if (own[i] === 0 || other[j] === 0) continue
      const c = uncertainty.ofParameter(2 * k + i, 2 * l + j)
      if (c === null) return null
      sum += own[i] * other[j] * c
    }
  return sum
}

const root = (variance: number | null): number | null =>
  variance !== null && variance >= 0 ? Math.sqrt(variance) : null

const componentOf = (
  recipe: Recipe,
  solution: Solution,
  uncertainty: Uncertainty | null,
  k: number,
): FittedComponent => {
  const { kind, shape } = recipe.components[k]!
  const edge = recipe.windowPerCm[1]
  const second = solution.parameters[2 * k + 1]!
  const figures = figuresOf(recipe.components[k]!, solution.parameters[2 * k]!, second, edge)
  const isBand = kind === 'band'
  const uWidth = isBand && uncertainty ? root(uncertainty.ofParameter(2 * k + 1, 2 * k + 1)) : null
  return {
    kind,
    positionPerCm: figures.positionPerCm,
    uPositionPerCm: uncertainty && root(positionCovariance(recipe, solution, uncertainty, k, k)),
    uModelPerCm: null,
    maximumPerCm: null,
    uMaximumPerCm: null,
    widthPerCm: figures.widthPerCm,
    uWidthPerCm: uWidth === null ? null : uWidth * figures.widthSlope,
    shape,
    height: solution.at.coefficients[k]! * figures.heightRatio,
    uHeight: isBand && uncertainty ? scaled(root(uncertainty.ofCoefficient(k)), figures.heightRatio) : null,
  }
}

const scaled = (u: number | null, by: number): number | null => (u === null ? null : u * by)

/** One maximum belongs to one component only: the nearest. */
const curveMaxima = (points: Selection, components: readonly FittedComponent[]): readonly (CurveMaximum | null)[] => {
  const byNoise = reweigh(points, 0)
  const found = components.map(({ kind, positionPerCm, widthPerCm, height }) =>
    kind === 'band' && height > 0 ? curveMaximum(byNoise, positionPerCm, widthPerCm) : null,
  )
  const distance = (k: number) => Math.abs(found[k]!.positionPerCm - components[k]!.positionPerCm)
  return found.map((own, k) => {
    if (!own) return null
    const rival = found.some(
      (other, l) =>
        other &&
        l !== k &&
        Math.abs(other.positionPerCm - own.positionPerCm) < 0.05 * components[k]!.widthPerCm &&
        distance(l) < distance(k),
    )
    return rival ? null : own
  })
}

/**
 * What structure in the residuals may have moved each centre by: the uncertainty were it scatter that is correlated along the
 * axis as it is, less the repeatability,
 * half a width at most. 0 where the recipe reaches the noise.
 */
const structureOf = (recipe: Recipe, solution: Solution, repeatability: Uncertainty | null): readonly number[] => {
  const asIfScatter = (recipe.misfit ?? 0) > 0 ? uncertaintyOf(recipe, solution) : null
  return recipe.components.map(({ kind }, k) => {
    if (kind === 'flank' || !asIfScatter || !repeatability) return 0
    const variance = (of: Uncertainty) => positionCovariance(recipe, solution, of, k, k) ?? 0
    const moved = Math.sqrt(Math.max(0, variance(asIfScatter) - variance(repeatability)))
    return Math.min(moved, solution.parameters[2 * k + 1]! / 2)
  })
}

/**
 * How far the fitted curve's maximum is from the measured one beyond what noise explains: what a shape that the recipe does not have does to the very place that is read off by eye.
 */
const maximumMissed = (
  points: Selection,
  { at }: Solution,
  { positionPerCm, widthPerCm }: FittedComponent,
  measured: CurveMaximum | null,
): number => {
  if (!measured) return 0
  const y = points.y.map((v, i) => v - at.residuals[i]! / points.weight[i]!)
  const modelled = curveMaximum({ ...reweigh(points, 0), y }, positionPerCm, widthPerCm)
  if (!modelled) return 0
  const distance = Math.abs(modelled.positionPerCm - measured.positionPerCm)
  // farther away it is another maximum
  const isSame = distance < widthPerCm / 4
  return isSame && distance > 3 * (measured.uPositionPerCm ?? Infinity) ? distance : 0
}

const backgroundOf = (
  { components, background }: Recipe,
  { at }: Solution,
  uncertainty: Uncertainty | null,
): FittedBackground => {
  const find = (kind: BackgroundTerm['kind']) => background.findIndex((term) => term.kind === kind)
  const value = (k: number) => (k < 0 ? 0 : at.coefficients[components.length + k]!)
  const scatter = background.find((term) => term.kind === 'scatter')
  const step = background.find((term) => term.kind === 'step')
  const k = find('step')
  return {
    constant: value(find('constant')),
    scatter: value(find('scatter')),
    scatterExponent: scatter?.exponent ?? null,
    step: step
      ? {
          atPerCm: step.atPerCm,
          height: value(k),
          uHeight: uncertainty && root(uncertainty.ofCoefficient(components.length + k)),
        }
      : null,
  }
}

/** A step that this very spectrum shows. */
const stepFlag = ({ step }: FittedBackground): readonly Flag[] =>
  step?.uHeight != null && Math.abs(step.height) > STEP_LIMIT * step.uHeight ? ['lamp-step'] : []

const flagsOf = (
  recipe: Recipe,
  points: Selection,
  solution: Solution,
  uncertainty: Uncertainty | null,
  present: readonly boolean[],
): readonly Flag[] => {
  const flags: Flag[] = []
  const n = points.x.length
  if (solution.stopped === 'iterations') flags.push('not-converged')
  if (!uncertainty) flags.push('ill-conditioned')
  if (solution.chi2 / n > MISFIT_LIMIT) flags.push('misfit')
  recipe.components.forEach(({ kind }, k) => {
    if (kind !== 'band') return
    const position = solution.parameters[2 * k]!
    if (!present[k]) flags.push('no-band')
    else if (position < points.x[0]! || position > points.x[n - 1]!) flags.push('outside-window')
    const held = [2 * k, 2 * k + 1].some((i) => uncertainty?.ofParameter(i, i) === null)
    if (held && solution.at.coefficients[k]! > 0) flags.push('at-bound')
  })
  return flags
}
