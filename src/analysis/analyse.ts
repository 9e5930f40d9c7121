import { chooseRecipe, componentsOf, fitBands } from '../bands/index.ts'
import type { BandFit, FittedComponent, Recipe, RecipeChoice } from '../bands/types.ts'
import type { Fault } from '../fault.ts'
import { assignBands, solveParameters } from '../ligandField/index.ts'
import type { AssignedBand, ObservedBand, ParameterFit } from '../ligandField/types.ts'
import type { RawSpectrum } from '../readers/types.ts'
import { nmOfWavenumber, prepareSpectrum } from '../spectrum/index.ts'
import type { Flag, Spectrum } from '../spectrum/types.ts'
import { type AnalysedBand, type Analysis, type AnalysisContext, ENGINE, type LockedRecipe } from './types.ts'

export type AnalysisOutcome =
  | { readonly kind: 'analysed'; readonly analysis: Analysis }
  | { readonly kind: 'refused'; readonly faults: readonly [Fault, ...Fault[]] }

/**
 * One spectrum through the house: prepared, its bands fitted, the ligand field solved.
 * With a locked recipe the spectrum is fitted by it and its bands keep their roles; without one a recipe is chosen.
 */
export const analyse = (raw: RawSpectrum, context: AnalysisContext, locked: LockedRecipe | null): AnalysisOutcome => {
  const prepared = prepareSpectrum(raw, context.prepare)
  if (prepared.kind === 'refused') return prepared
  const { spectrum } = prepared
  return { kind: 'analysed', analysis: locked ? byRecipe(spectrum, context, locked) : byItself(spectrum, context) }
}

const byRecipe = (spectrum: Spectrum, context: AnalysisContext, locked: LockedRecipe): Analysis =>
  fitted(spectrum, context, locked, fitBands(spectrum, locked.recipe, locked.admissible))

/** With a recipe chosen on this very spectrum. */
const byItself = (spectrum: Spectrum, context: AnalysisContext): Analysis => {
  const choice = chosen([spectrum], context)
  if (choice.kind === 'none') return unfitted(spectrum, choice)
  const { recipe, admissible } = choice
  const fit = fitBands(spectrum, recipe, admissible)
  const assigned = assignedTo(recipe, fit.kind === 'fitted' ? fit.components : null, context)
  return fitted(spectrum, context, { recipe, admissible, ...assigned }, fit)
}

/** A spectrum that could not even be prepared, as the record keeps it: nothing but the reason. */
export const unprepared = (raw: RawSpectrum, faults: readonly Fault[]): Analysis => {
  const why = faults.map(({ what }) => what).join('; ')
  return {
    engine: ENGINE,
    spectrum: null,
    fit: { kind: 'unfitted', why, points: raw.x.length, windowPerCm: null, flags: [] },
    locked: null,
    bands: [],
    ligandField: null,
    flags: [],
    remarks: [why],
  }
}

/**
 * The recipe for a sample, chosen on all its reference spectra together, with the roles of its components.
 * `none` says why no recipe describes them.
 */
export const lockRecipe = (
  spectra: readonly Spectrum[],
  context: AnalysisContext,
): LockedRecipe | Extract<RecipeChoice, { kind: 'none' }> => {
  const choice = chosen(spectra, context)
  if (choice.kind === 'none') return choice
  const { recipe, admissible } = choice
  return { recipe, admissible, ...assignedTo(recipe, componentsOf(spectra.at(-1)!, recipe), context) }
}

const chosen = (spectra: readonly Spectrum[], context: AnalysisContext): RecipeChoice => {
  const bands = context.bands ?? expectedInside(spectra, context)
  return chooseRecipe(spectra, {
    ...(bands === null ? {} : { bands }),
    hints: context.expected.map(({ nearPerCm, withinPerCm, shape, narrow }) => ({
      positionPerCm: nearPerCm,
      withinPerCm,
      shape,
      narrow,
    })),
  })
}

const assignedTo = (recipe: Recipe, components: readonly FittedComponent[] | null, context: AnalysisContext) =>
  components === null ? { roles: recipe.components.map(() => NO_ROLE), flags: [] } : assign(components, context)

/** How many of the species' broad bands the spectra can show; null where nothing is expected. */
const expectedInside = (spectra: readonly Spectrum[], { expected }: AnalysisContext): number | null => {
  const low = Math.max(...spectra.map(({ wavenumberPerCm }) => wavenumberPerCm[0]!))
  const high = Math.min(...spectra.map(({ wavenumberPerCm }) => wavenumberPerCm.at(-1)!))
  const inside = expected.filter(({ nearPerCm, narrow }) => !narrow && nearPerCm > low && nearPerCm < high).length
  return inside === 0 ? null : inside
}

const NO_ROLE: AssignedBand = { role: null, term: null }

const assign = (components: readonly FittedComponent[], context: AnalysisContext) => {
  const places = components.flatMap((component, i) => (component.kind === 'band' ? [i] : []))
  const observed: ObservedBand[] = places.map((i) => {
    const { positionPerCm, uPositionPerCm, widthPerCm, height } = components[i]!
    return {
      positionPerCm,
      uPositionPerCm: uPositionPerCm ?? widthPerCm,
      widthPerCm,
      height,
      hint: expectedRole(positionPerCm, context),
    }
  })
  const assignment = assignBands(context.ion, context.geometry, context.spin, observed)
  const roles = components.map(() => NO_ROLE)
  places.forEach((place, k) => {
    roles[place] = assignment.bands[k] ?? NO_ROLE
  })
  return { roles, flags: assignment.flags }
}

/** The species' expectation nearest to a position, if one claims it. */
const expectedRole = (positionPerCm: number, { expected }: AnalysisContext): string | null => {
  const claims = expected
    .map(({ role, nearPerCm, withinPerCm }) => ({ role, miss: Math.abs(positionPerCm - nearPerCm), withinPerCm }))
    .filter(({ miss, withinPerCm }) => miss <= withinPerCm)
    .sort((a, b) => a.miss - b.miss)
  return claims[0]?.role ?? null
}

const unfitted = (spectrum: Spectrum, none: Extract<RecipeChoice, { kind: 'none' }>): Analysis => {
  const points = spectrum.used.reduce((sum, used) => sum + used, 0)
  return {
    engine: ENGINE,
    spectrum,
    fit: { kind: 'unfitted', why: none.why, points, windowPerCm: null, flags: none.flags },
    locked: null,
    bands: [],
    ligandField: null,
    flags: unique([...spectrum.flags, ...none.flags]),
    remarks: [...spectrum.remarks, none.why],
  }
}

const fitted = (spectrum: Spectrum, context: AnalysisContext, locked: LockedRecipe, fit: BandFit): Analysis => {
  if (fit.kind === 'unfitted')
    return {
      engine: ENGINE,
      spectrum,
      fit,
      locked,
      bands: [],
      ligandField: null,
      flags: unique([...spectrum.flags, ...fit.flags]),
      remarks: [...spectrum.remarks, fit.why],
    }
  const covariance = withWavelengthError(fit, context.repeatabilityNm)
  const bands = fit.components.map((component, i) =>
    band(component, locked.roles[i] ?? NO_ROLE, covariance?.[i]?.[i] ?? null, spectrum, context.repeatabilityNm),
  )
  const ligandField = covariance === null ? null : solve(bands, covariance, context)
  return {
    engine: ENGINE,
    spectrum,
    fit,
    locked,
    bands,
    ligandField,
    flags: unique([...spectrum.flags, ...fit.flags, ...locked.flags, ...(ligandField?.flags ?? [])]),
    remarks: [...spectrum.remarks, ...(ligandField?.remarks ?? [])],
  }
}

/**
 * The wavelength axis as a whole is repeatable to u nm only: that error shifts all bands together,
 * so it enters the covariance as (dν̃ᵢ/dλ)(dν̃ⱼ/dλ)u² with dν̃/dλ = −ν̃²·10⁻⁷ cm⁻¹/nm.
 */
const withWavelengthError = (
  fit: Extract<BandFit, { kind: 'fitted' }>,
  repeatabilityNm: number | null,
): readonly (readonly number[])[] | null => {
  if (fit.positionCovariance === null) return null
  const shift = fit.components.map(({ positionPerCm }) => perCmPerNm(positionPerCm) * (repeatabilityNm ?? 0))
  return fit.positionCovariance.map((row, i) => row.map((value, j) => value + shift[i]! * shift[j]!))
}

const perCmPerNm = (perCm: number): number => perCm * perCm * 1e-7

const band = (
  component: FittedComponent,
  { role, term }: AssignedBand,
  variance: number | null,
  spectrum: Spectrum,
  repeatabilityNm: number | null,
): AnalysedBand => {
  const { kind, positionPerCm, uPositionPerCm, uMaximumPerCm, maximumPerCm, ...rest } = component
  const uAxis = maximumPerCm === null ? 0 : perCmPerNm(maximumPerCm) * (repeatabilityNm ?? 0)
  return {
    ...rest,
    role: kind === 'band' ? role : null,
    term: kind === 'band' ? term : null,
    positionPerCm,
    uPositionPerCm: variance === null || uPositionPerCm === null ? null : Math.sqrt(variance),
    maximumPerCm,
    uMaximumPerCm: uMaximumPerCm === null ? null : Math.hypot(uMaximumPerCm, uAxis),
    maximumNm: maximumPerCm === null ? null : nmOfWavenumber(maximumPerCm, spectrum.medium),
  }
}

const solve = (
  bands: readonly AnalysedBand[],
  covariance: readonly (readonly number[])[],
  { ion, geometry, spin }: AnalysisContext,
): ParameterFit | null => {
  // a position that is held at its bound has no uncertainty, so it can't weigh in
  const places = bands.flatMap(({ role, uPositionPerCm }, i) => (role === null || uPositionPerCm === null ? [] : [i]))
  if (places.length === 0) return null
  return solveParameters(
    ion,
    geometry,
    spin,
    places.map((i) => ({ role: bands[i]!.role!, positionPerCm: bands[i]!.positionPerCm })),
    places.map((i) => places.map((j) => covariance[i]![j]!)),
  )
}

const unique = (flags: readonly Flag[]): readonly Flag[] => [...new Set(flags)]
