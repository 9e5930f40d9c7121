/**
 * Bands of the shape that their species asks for. Asymmetry, Lorentzian share, quantum and Huang–Rhys factor are found on the reference
 * spectra together, where the recipe comes closest to them, and held from then on: two spectra under one recipe differ by
 * positions, widths and heights only.
 */
import { recipeName } from './candidates.ts'
import { goldenMinimum } from './golden.ts'
import type { Selection } from './points.ts'
import { WIDEST_PER_CM } from './seeds.ts'
import { FOUR_LN2 } from './shapes.ts'
import { ROUGH, type Solution, solveRecipe } from './solveRecipe.ts'
import type { BandHint, BandShape, Recipe, RecipeComponent } from './types.ts'

/** Half maxima whose distances from the centre are as e^2b : 1. */
const MOST_SKEW = 0.6
/** Metal–ligand vibrations and their overtones; above, ligands' own (common practice). cm⁻¹ */
const QUANTA_PER_CM = [200, 300, 400, 500, 600, 800, 1000, 1300] as const
const HUANG_RHYS = [0.5, 1, 2, 3, 5, 8] as const
/** A line of a progression is no narrower; below, noise is fitted. cm⁻¹ */
const NARROWEST_LINE_PER_CM = 60
const STEPS = 14
/** What one band's shape is depends on its neighbours': each is found so many times. */
const ROUNDS = 2

/** Every band that a hint gives a shape to gets it; others stay as they are. */
export const shaped = (recipe: Recipe, hints: readonly BandHint[], points: readonly Selection[]): Recipe => {
  const wanted = hints.flatMap((hint) => {
    const k = nearest(recipe, hint)
    return hint.shape === undefined || hint.shape === 'gaussian' || k === null ? [] : [{ k, shape: hint.shape }]
  })
  let current = recipe
  for (let round = 0; round < (wanted.length > 1 ? ROUNDS : 1); round++)
    for (const { k, shape } of wanted) current = FINDERS[shape](current, k, points)
  return wanted.length === 0 ? recipe : { ...current, name: recipeName(current.components, current.background) }
}

const nearest = ({ components }: Recipe, { positionPerCm, withinPerCm }: BandHint): number | null => {
  const distance = (k: number) => Math.abs(components[k]!.positionPerCm - positionPerCm)
  const bands = components.flatMap(({ kind, narrow }, k) => (kind === 'band' && !narrow ? [k] : []))
  const k = bands.toSorted((a, b) => distance(a) - distance(b))[0]
  return k !== undefined && distance(k) < Math.max(withinPerCm, components[k]!.widthPerCm / 2) ? k : null
}

type Finder = (recipe: Recipe, k: number, points: readonly Selection[]) => Recipe

const findSkew: Finder = (recipe, k, points) => {
  const at = (skew: number) => withShape(recipe, k, { kind: 'log-normal', skew: skew === 0 ? 1e-6 : skew })
  return rested(at(goldenMinimum((skew) => misfitOf(at(skew), points), -MOST_SKEW, MOST_SKEW, STEPS)), points)
}

const findLorentz: Finder = (recipe, k, points) => {
  const at = (lorentz: number) => withShape(recipe, k, { kind: 'pseudo-voigt', lorentz })
  return rested(at(goldenMinimum((lorentz) => misfitOf(at(lorentz), points), 0, 1, STEPS)), points)
}

const findProgression: Finder = (recipe, k, points) => {
  const { widthPerCm } = recipe.components[k]!
  const at = (quantumPerCm: number, huangRhys: number) =>
    withShape(recipe, k, { kind: 'progression', quantumPerCm, huangRhys }, lineOf(widthPerCm, quantumPerCm, huangRhys))
  const grid = QUANTA_PER_CM.flatMap((quantum) => HUANG_RHYS.map((factor) => ({ quantum, factor })))
  const chi2 = grid.map(({ quantum, factor }) => misfitOf(at(quantum, factor), points))
  const start = grid[chi2.indexOf(Math.min(...chi2))]!
  let [quantum, factor]: [number, number] = [start.quantum, start.factor]
  for (let round = 0; round < ROUNDS; round++) {
    quantum = goldenMinimum((q) => misfitOf(at(q, factor), points), quantum / 1.3, quantum * 1.3, STEPS)
    factor = goldenMinimum((s) => misfitOf(at(quantum, s), points), factor / 1.6, factor * 1.6, STEPS)
  }
  return rested(at(quantum, factor), points)
}

const FINDERS: Readonly<Record<Exclude<BandShape['kind'], 'gaussian'>, Finder>> = {
  'log-normal': findSkew,
  'pseudo-voigt': findLorentz,
  progression: findProgression,
}

/** Width of a line where the whole is so wide: variances add, S q² that of the lines. */
const lineOf = (widthPerCm: number, quantumPerCm: number, huangRhys: number): number => {
  const rest = widthPerCm ** 2 - 2 * FOUR_LN2 * huangRhys * quantumPerCm ** 2
  return Math.sqrt(Math.max(rest, (quantumPerCm / 2) ** 2))
}

const withShape = (recipe: Recipe, k: number, shape: BandShape, linePerCm?: number): Recipe => {
  const line =
    linePerCm === undefined
      ? {}
      : { widthPerCm: linePerCm, widthBoundsPerCm: [NARROWEST_LINE_PER_CM, WIDEST_PER_CM] as const }
  return {
    ...recipe,
    components: recipe.components.map((component, i) => (i === k ? { ...component, shape, ...line } : component)),
  }
}

const misfitOf = (recipe: Recipe, points: readonly Selection[]): number =>
  points.reduce((sum, selection) => sum + (solveRecipe(recipe, selection, ROUGH)?.chi2 ?? Infinity), 0)

/** The recipe with its bands starting from where they come to rest, on average. */
export const rested = (recipe: Recipe, points: readonly Selection[]): Recipe => {
  const solutions = points.map((selection) => solveRecipe(recipe, selection, ROUGH)).filter((found) => found !== null)
  if (solutions.length === 0) return recipe
  return { ...recipe, components: recipe.components.map((component, k) => restedAt(component, solutions, k)) }
}

const restedAt = (component: RecipeComponent, solutions: readonly Solution[], k: number): RecipeComponent => {
  if (component.kind === 'flank') return component
  const mean = (i: number) => solutions.reduce((sum, { parameters }) => sum + parameters[i]!, 0) / solutions.length
  return { ...component, positionPerCm: mean(2 * k), widthPerCm: mean(2 * k + 1) }
}
