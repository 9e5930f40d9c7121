/**
 * A series between two compounds: how much of the first and of the last spectrum each one holds, whether the two shares make up the whole,
 * and whether the curves cross in common points.
 */
import { chooseRecipe, crossingPlaces, fitBands, fitTogether } from '../bands/index.ts'
import type { CommonFit, Recipe } from '../bands/types.ts'
import { nmOfWavenumber } from '../spectrum/index.ts'
import type { Spectrum } from '../spectrum/types.ts'

export interface Share {
  readonly first: number
  readonly uFirst: number
  readonly last: number
  readonly uLast: number
  readonly sum: number
  /** Root mean square of what the mixture does not describe, absorbance. */
  readonly rms: number
}

export interface Crossings {
  readonly fromNm: number
  readonly toNm: number
  /** How many neighbouring pairs of spectra cross here. */
  readonly pairs: number
  readonly holds: boolean
}

export type Mixture =
  | {
      readonly kind: 'mixture'
      /** In the order of the spectra. */
      readonly shares: readonly Share[]
      readonly crossings: readonly Crossings[]
      readonly misfit: number
      readonly flags: readonly MixtureFlag[]
      /** What a chemist must know before the shares are believed, in sentences. */
      readonly remarks: readonly string[]
    }
  | { readonly kind: 'none'; readonly why: string }

/** `no-closure`: shares do not add up to one; `wandering-crossings`: curves cross where they should not between two compounds; `misfit`: two compounds do not describe the spectra. */
export type MixtureFlag = 'no-closure' | 'wandering-crossings' | 'misfit'

const FEWEST = 3
/** The two shares make up the whole where their sum is one within a hundredth. */
const CLOSES_WITHIN = 0.01
/** Standard uncertainties of a sum that may explain what it is off by. */
const EXPLAINED_WITHIN_U = 3
/** Share of the spread that the mixture may miss the spectra by. */
const MISFIT_LIMIT = 0.05

/** `spectra` in the order of the series; the first and the last are taken as pure. */
export const mixtureOf = (spectra: readonly Spectrum[]): Mixture => {
  if (spectra.length < FEWEST)
    return {
      kind: 'none',
      why: `a mixture is told from ${FEWEST} spectra at least: the two ends, and what lies between`,
    }
  const [first, last] = [spectra[0]!, spectra.at(-1)!]
  const ends = [first, last].map((spectrum) => chooseRecipe([spectrum], {}))
  const [one, other] = ends
  if (one!.kind === 'none') return { kind: 'none', why: `the first spectrum: ${one!.why}` }
  if (other!.kind === 'none') return { kind: 'none', why: `the last spectrum: ${other!.why}` }
  const recipes = [one!.recipe, other!.recipe]
  const windowPerCm = [
    Math.max(...recipes.map((recipe) => recipe.windowPerCm[0])),
    Math.min(...recipes.map((recipe) => recipe.windowPerCm[1])),
  ] as const
  const species = [bandsOf(first, recipes[0]!), bandsOf(last, recipes[1]!)]
  const pure = spectra.map((_, s) => (s === 0 ? 0 : s === spectra.length - 1 ? 1 : null))
  const fit = fitTogether(spectra, species, windowPerCm, pure)
  if (fit.kind === 'unfitted') return { kind: 'none', why: fit.why }
  return described(fit, spectra)
}

const bandsOf = (spectrum: Spectrum, recipe: Recipe) => {
  const fit = fitBands(spectrum, recipe, [])
  const heights = fit.kind === 'fitted' ? fit.components.map(({ height }) => height) : []
  const bands = recipe.components.flatMap((component, k) =>
    component.kind === 'band' ? [{ component, height: heights[k] ?? 0 }] : [],
  )
  const leading = bands.reduce((sum, { height }) => Math.max(sum, height), 0)
  // the first is the strongest: ratios are to it
  const ranked = bands.toSorted((a, b) => b.height - a.height)
  return ranked.map(({ component, height }) => ({ ...component, ratio: leading > 0 ? height / leading : 1 }))
}

const described = (fit: Extract<CommonFit, { kind: 'fitted' }>, spectra: readonly Spectrum[]): Mixture => {
  const [wholeFirst, wholeLast] = [fit.spectra[0]!.amounts[0]!, fit.spectra.at(-1)!.amounts[1]!]
  const [uWholeFirst, uWholeLast] = [fit.spectra[0]!.uAmounts[0]!, fit.spectra.at(-1)!.uAmounts[1]!]
  if (!(wholeFirst > 0 && wholeLast > 0)) return { kind: 'none', why: 'one of the two ends shows no band' }
  const shares = fit.spectra.map(({ amounts, uAmounts, rms }, s): Share => {
    const [a, b] = [amounts[0]! / wholeFirst, amounts[1]! / wholeLast]
    // the ends are whole by definition
    const isEnd = s === 0 || s === spectra.length - 1
    return {
      first: a,
      uFirst: isEnd ? 0 : Math.hypot(uAmounts[0]!, a * uWholeFirst) / wholeFirst,
      last: b,
      uLast: isEnd ? 0 : Math.hypot(uAmounts[1]!, b * uWholeLast) / wholeLast,
      sum: a + b,
      rms,
    }
  })
  const medium = spectra[0]!.medium
  const crossings = crossingPlaces(spectra).map(({ fromPerCm, toPerCm, crossings: all, holds }) => ({
    fromNm: nmOfWavenumber(toPerCm, medium),
    toNm: nmOfWavenumber(fromPerCm, medium),
    pairs: all.length,
    holds,
  }))
  const open = shares.filter(({ sum }) => Math.abs(sum - 1) > CLOSES_WITHIN)
  const wanders = crossings.some(({ holds }) => !holds)
  return {
    kind: 'mixture',
    shares,
    crossings,
    misfit: fit.misfit,
    flags: [
      ...(open.length > 0 ? (['no-closure'] as const) : []),
      ...(wanders ? (['wandering-crossings'] as const) : []),
      ...(fit.misfit > MISFIT_LIMIT ? (['misfit'] as const) : []),
    ],
    remarks: [...closure(shares, open), ...crossing(crossings), ...missed(fit.misfit)],
  }
}

const percent = (share: number) => `${(100 * share).toFixed(1)} %`

const closure = (shares: readonly Share[], open: readonly Share[]): readonly string[] => {
  const sums = shares.map(({ sum }) => sum)
  const range = `${percent(Math.min(...sums))} to ${percent(Math.max(...sums))}`
  if (open.length === 0) return [`the two shares add up to one (${range})`]
  const isExplained = open.every(
    ({ sum, uFirst, uLast }) => Math.abs(sum - 1) < EXPLAINED_WITHIN_U * Math.hypot(uFirst, uLast),
  )
  const cause = isExplained ? 'no more than their uncertainty explains' : 'volume, path or a third compound'
  return [
    `the two shares do not quite add up to one in ${open.length} of ${shares.length} spectra (${range}): ${cause}`,
  ]
}

const crossing = (crossings: readonly Crossings[]): readonly string[] => {
  const range = ({ fromNm, toNm }: Crossings) => `${fromNm.toFixed(1)} to ${toNm.toFixed(1)} nm`
  const held = crossings.filter(({ holds }) => holds)
  const wandering = crossings.filter(({ holds }) => !holds)
  return [
    ...held.map(({ fromNm, toNm }) => `an isosbestic point holds at ${((fromNm + toNm) / 2).toFixed(1)} nm`),
    ...(wandering.length === 0
      ? []
      : [
          `neighbouring curves cross at ${wandering.map(range).join(', ')}: farther apart than noise explains, so not two compounds alone, or a baseline that moves`,
        ]),
  ]
}

const missed = (misfit: number): readonly string[] =>
  misfit > MISFIT_LIMIT
    ? [
        `two compounds of Gaussian bands miss the curves by ${percent(misfit)} of their spread; trust shares to about that`,
      ]
    : []
