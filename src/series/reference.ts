import jstat from 'jstat'
import { meanOrNull } from './occasions.ts'
import { line, mean, type Point, uOfMean } from './statistics.ts'
import type { Occasion, ReferenceState } from './types.ts'

/**
 * What a sample is compared with: the mean of its first occasions, frozen once they are there, and refused where they
 * have a slope, for a reference that moves would hide what it is there to show.
 *
 * The slope is tested on each band position, splitting and height, at a total risk of FALSE_REFUSAL for a sample that
 * is steady (Bonferroni). Where the scatter about the line agrees with the uncertainties of the values (χ² test at
 * SCATTER_LEVEL), u of the slope is the predicted one and the quantile is the normal distribution's; otherwise it is
 * the observed one and the quantile is Student's with n − 2 degrees of freedom. Below three occasions nothing is tested.
 */
const FALSE_REFUSAL = 0.01
const SCATTER_LEVEL = 0.01
const TESTED = /^(nu[1-6]|delta_o|height[1-6])$/

export interface ReferenceOptions {
  /** A person has approved these occasions as the reference: their slope is not asked for. */
  readonly approved?: boolean
}

/** Reference from the first `n` of these occasions (ascending in time, of one recipe, excluded spectra left out). */
export const referenceOf = (
  occasions: readonly Occasion[],
  n: number,
  { approved = false }: ReferenceOptions = {},
): ReferenceState => {
  if (occasions.length < n) return { kind: 'gathering', have: occasions.length, need: n }
  const first = occasions.slice(0, n)
  const sloping = approved ? null : slopingQuantity(first)
  if (sloping !== null) return { kind: 'refused', why: sloping }
  return ready(first)
}

/** Reference typed into the configuration: values with their standard uncertainties. */
export const typedReference = (
  typed: Readonly<Record<string, readonly [value: number, u: number]>>,
): ReferenceState => {
  const entries = Object.entries(typed)
  return {
    kind: 'ready',
    values: Object.fromEntries(entries.map(([name, [value]]) => [name, value])),
    u: Object.fromEntries(entries.map(([name, [, u]]) => [name, u])),
    occasions: 0,
    until: null,
    absorbanceAt: () => null,
  }
}

/** A quantity that fewer than half of the occasions have is not part of the reference. */
const ready = (occasions: readonly Occasion[]): ReferenceState => {
  const names = new Set(occasions.flatMap(({ values }) => Object.keys(values)))
  const values: Record<string, number | null> = {}
  const u: Record<string, number | null> = {}
  for (const name of names) {
    const having = occasions.filter((occasion) => (occasion.values[name] ?? null) !== null)
    const found = having.map((occasion) => occasion.values[name]!)
    const enough = 2 * found.length >= occasions.length
    values[name] = enough ? mean(found) : null
    u[name] = enough
      ? uOfMean(
          found,
          having.map((occasion) => occasion.u[name] ?? null),
        )
      : null
  }
  return {
    kind: 'ready',
    values,
    u,
    occasions: occasions.length,
    until: occasions.at(-1)!.at,
    absorbanceAt: (nm) => meanOrNull(occasions.map((occasion) => occasion.absorbanceAt(nm))),
  }
}

const MS_PER_DAY = 86_400_000

/** Says which quantity moves, or null where none does significantly. */
const slopingQuantity = (occasions: readonly Occasion[]): string | null => {
  const names = [...new Set(occasions.flatMap(({ values }) => Object.keys(values)))].filter((name) => TESTED.test(name))
  const series = names
    .map((name) => ({ name, points: pointsOf(occasions, name) }))
    .filter(({ points }) => points.length >= 3)
  const risk = FALSE_REFUSAL / series.length
  const moving = series.find(({ points }) => isSloping(points, risk))
  if (moving === undefined) return null
  const perDay = line(moving.points)!.slope
  const unit = moving.name.startsWith('height') ? '' : ' cm^-1'
  return `the reference occasions have a slope: ${moving.name} moves by ${perDay.toPrecision(2)}${unit} a day`
}

const pointsOf = (occasions: readonly Occasion[], name: string): readonly Point[] =>
  occasions.flatMap((occasion): readonly Point[] => {
    const value = occasion.values[name] ?? null
    return value === null ? [] : [{ at: occasion.at / MS_PER_DAY, value, u: occasion.u[name] ?? null }]
  })

/** Two-sided test of a slope against zero at the level `risk`. */
export const isSloping = (points: readonly Point[], risk: number): boolean => {
  const fitted = line(points)
  if (fitted === null || fitted.observedUSlope === null) return false
  const { slope, predictedUSlope, observedUSlope } = fitted
  const freedom = points.length - 2
  if (predictedUSlope !== null) {
    const chi2 = freedom * (observedUSlope / predictedUSlope) ** 2
    if (chi2 <= jstat.chisquare.inv(1 - SCATTER_LEVEL, freedom))
      return Math.abs(slope) > jstat.normal.inv(1 - risk / 2, 0, 1) * predictedUSlope
  }
  return Math.abs(slope) > jstat.studentt.inv(1 - risk / 2, freedom) * observedUSlope
}
