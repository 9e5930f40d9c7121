import type { AnalysedBand, Analysis } from './types.ts'

/** `[value, standard uncertainty]`; either is null where it could not be had. */
export type Measured = readonly [value: number | null, u: number | null]

/** Path to which heights are converted, mm. */
const STANDARD_PATH_MM = 10

const NOTHING: Measured = [null, null]

/**
 * The numbers of one analysis under the names and in the units of the rule language (cm⁻¹; heights at 10 mm path).
 * A split band counts as its degeneracy-weighted mean; its width, height and maximum are those of its higher component.
 */
export const quantitiesOf = (analysis: Analysis, pathMm: number): Readonly<Record<string, Measured>> => {
  const { ligandField: field, fit } = analysis
  const toStandardPath = STANDARD_PATH_MM / pathMm
  const perBand = [1, 2, 3, 4, 5, 6].flatMap((n) => Object.entries(bandQuantities(analysis.bands, n, toStandardPath)))
  const [h1, h2] = [1, 2].map((n) => strongest(componentsOf(analysis.bands, n)))
  return {
    delta_o: [field?.deltaPerCm ?? null, field?.uDeltaPerCm ?? null],
    b: [field?.bPerCm ?? null, field?.uBPerCm ?? null],
    c: [field?.cPerCm ?? null, field?.uCPerCm ?? null],
    beta: [field?.beta ?? null, scaled(field?.uBPerCm, field?.betaFreeIonBPerCm)],
    dq_over_b: [field?.dqOverB ?? null, null],
    ...Object.fromEntries(perBand),
    area_ratio21: h1 && h2 ? [(h2.height * h2.widthPerCm) / (h1.height * h1.widthPerCm), null] : NOTHING,
    scatter: fit.kind === 'fitted' ? [fit.background.scatter * toStandardPath, null] : NOTHING,
    offset: fit.kind === 'fitted' ? [fit.background.constant * toStandardPath, null] : NOTHING,
    rms: fit.kind === 'fitted' ? [fit.rms, null] : NOTHING,
    noise: fit.kind === 'fitted' ? [fit.noise, null] : NOTHING,
    reduced_chi2: fit.kind === 'fitted' ? [fit.reducedChi2, null] : NOTHING,
  }
}

const scaled = (u: number | null | undefined, by: number | null | undefined): number | null =>
  u === null || u === undefined || by === null || by === undefined ? null : u / by

/** The bands that carry `nu1`, or its split components `nu1a`, `nu1b`. */
const componentsOf = (bands: readonly AnalysedBand[], n: number): readonly AnalysedBand[] =>
  bands.filter(({ role }) => role === `nu${n}` || role === `nu${n}a` || role === `nu${n}b`)

const strongest = (bands: readonly AnalysedBand[]): AnalysedBand | undefined =>
  bands.reduce<AnalysedBand | undefined>((best, band) => (best && best.height >= band.height ? best : band), undefined)

const bandQuantities = (bands: readonly AnalysedBand[], n: number, toStandardPath: number) => {
  const components = componentsOf(bands, n)
  const band = strongest(components)
  if (band === undefined)
    return { [`nu${n}`]: NOTHING, [`max${n}`]: NOTHING, [`width${n}`]: NOTHING, [`height${n}`]: NOTHING }
  return {
    [`nu${n}`]: meanPosition(components),
    [`max${n}`]: [band.maximumPerCm, band.uMaximumPerCm] satisfies Measured,
    [`width${n}`]: [band.widthPerCm, band.uWidthPerCm] satisfies Measured,
    [`height${n}`]: [
      band.height * toStandardPath,
      band.uHeight === null ? null : band.uHeight * toStandardPath,
    ] satisfies Measured,
  }
}

const meanPosition = (components: readonly AnalysedBand[]): Measured => {
  const weights = components.map(({ term }) => spaceDegeneracy(term))
  const total = weights.reduce((sum, w) => sum + w, 0)
  const mean = components.reduce((sum, band, i) => sum + weights[i]! * band.positionPerCm, 0) / total
  const us = components.map(({ uPositionPerCm }) => uPositionPerCm)
  if (us.some((u) => u === null)) return [mean, null]
  return [mean, Math.hypot(...us.map((u, i) => (weights[i]! * u!) / total))]
}

/** Spatial degeneracy of a term: `A`, `B` 1; `E` 2; `T` 3. */
const spaceDegeneracy = (term: string | null): number => {
  const letter = term?.match(/[ABET]/)?.[0]
  return letter === 'T' ? 3 : letter === 'E' ? 2 : 1
}
