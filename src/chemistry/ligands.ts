/**
 * What a set of ligands makes of an ion. Jørgensen's rules: Δ = f g and β = 1 − h k, each ligand counted by the places it
 * takes (rule of average environment). f, h as in Jørgensen's tables as restated in textbooks; where no h is given there
 * is no estimate of B. They are good to a few percent at best, and cyanide's f is too high by a tenth.
 *
 * One or two unlike ligands on one axis make the field tetragonal. With Dq of the ligands in the plane and the mean Dq of
 * the two on the axis (Wentworth and Piper, Inorg. Chem. 4 (1965) 709, from memory):
 *
 *   Dt = (4/7)(Dq_plane − Dq_axis),    10Dq(cubic) = 10Dq_plane − (35/6) Dt,
 *
 * and the first band of d3 and low-spin d6 parts into B2 (d3) or A2 (d6), where it was for the plane's ligands alone, and
 * E, lower by (35/4) Dt.
 */
import type { KnownIon } from './ions.ts'

export interface Ligand {
  readonly name: string
  readonly f: number
  readonly h: number | null
  /** Places it takes. */
  readonly denticity: 1 | 2
}

const LIGANDS: readonly Ligand[] = [
  { name: 'Br-', f: 0.72, h: 2.3, denticity: 1 },
  { name: 'SCN-', f: 0.75, h: null, denticity: 1 },
  { name: 'Cl-', f: 0.78, h: 2.0, denticity: 1 },
  { name: 'N3-', f: 0.83, h: null, denticity: 1 },
  { name: 'F-', f: 0.9, h: 0.8, denticity: 1 },
  { name: 'Me2SO', f: 0.91, h: null, denticity: 1 },
  { name: 'acetone', f: 0.92, h: 1.2, denticity: 1 },
  { name: 'EtOH', f: 0.97, h: null, denticity: 1 },
  { name: 'dmf', f: 0.98, h: null, denticity: 1 },
  { name: 'ox', f: 0.99, h: 1.5, denticity: 2 },
  { name: 'H2O', f: 1.0, h: 1.0, denticity: 1 },
  { name: 'thiourea', f: 1.01, h: null, denticity: 1 },
  { name: 'NCS-', f: 1.02, h: null, denticity: 1 },
  { name: 'gly', f: 1.18, h: null, denticity: 2 },
  { name: 'SO3', f: 1.2, h: null, denticity: 1 },
  { name: 'MeCN', f: 1.22, h: null, denticity: 1 },
  { name: 'NH3', f: 1.25, h: 1.4, denticity: 1 },
  { name: 'en', f: 1.28, h: 1.5, denticity: 2 },
  { name: 'diars', f: 1.33, h: null, denticity: 2 },
  { name: 'bipy', f: 1.33, h: null, denticity: 2 },
  { name: 'NO2-', f: 1.4, h: null, denticity: 1 },
  { name: 'CN-', f: 1.7, h: 2.0, denticity: 1 },
]

const withoutCharge = (name: string): string =>
  name
    .trim()
    .toLowerCase()
    .replace(/[-−–]$/, '')

/** A ligand by its usual symbol (`NH3`, `Cl-`, `Cl`, `ox2-`, `en`), or null. */
export const findLigand = (name: string): Ligand | null => {
  const asked = withoutCharge(name)
  const named = (text: string): Ligand | undefined => LIGANDS.find((ligand) => withoutCharge(ligand.name) === text)
  return named(asked) ?? named(asked.replace(/2$/, '')) ?? null
}

export type Environment =
  | {
      readonly kind: 'estimated'
      /** Places taken: 6 for a full octahedron. */
      readonly places: number
      readonly f: number
      /** Null where a ligand has no h. */
      readonly h: number | null
      readonly deltaPerCm: number | null
      readonly bPerCm: number | null
    }
  | { readonly kind: 'unknown'; readonly ligands: readonly string[] }

/** Δ and B to expect of an octahedral complex with these ligands (number of each). Null where the ion has no g, k or B₀. */
export const averageEnvironment = (ion: KnownIon, ligands: Readonly<Record<string, number>>): Environment => {
  const entries = Object.entries(ligands).map(([name, count]) => ({ name, count, ligand: findLigand(name) }))
  const unknown = entries.filter(({ ligand, count }) => ligand === null || !(count > 0)).map(({ name }) => name)
  if (unknown.length > 0 || entries.length === 0) return { kind: 'unknown', ligands: unknown }
  const weights = entries.map(({ ligand, count }) => ({ ligand: ligand!, places: ligand!.denticity * count }))
  const places = weights.reduce((sum, entry) => sum + entry.places, 0)
  const mean = (of: (ligand: Ligand) => number | null): number | null =>
    weights.reduce<number | null>((sum, { ligand, places: taken }) => {
      const value = of(ligand)
      return sum === null || value === null ? null : sum + (value * taken) / places
    }, 0)
  const f = mean((ligand) => ligand.f)!
  const h = mean((ligand) => ligand.h)
  const covalent = h === null || ion.k === null ? null : 1 - h * ion.k
  return {
    kind: 'estimated',
    places,
    f,
    h,
    deltaPerCm: ion.gPerCm === null ? null : f * ion.gPerCm,
    bPerCm: covalent === null || covalent <= 0 || ion.freeIonBPerCm === null ? null : covalent * ion.freeIonBPerCm,
  }
}

export interface SplittingPattern {
  /** 10Dq of the ligands in the plane, the Δ of `tendq levels --dt`. cm⁻¹ */
  readonly deltaInPlanePerCm: number
  /** Mean over all six places. cm⁻¹ */
  readonly deltaCubicPerCm: number
  /** Positive where the axis is the weaker. cm⁻¹ */
  readonly dtPerCm: number
  /** By how much the pair (E) lies below the single level of the first band of d3 or low-spin d6. cm⁻¹ */
  readonly pairBelowSinglePerCm: number
}

/** How a tetragonal octahedron splits: four places in the plane of one ligand, the two axial ones as given. Null where unknown. */
export const splittingPattern = (
  ion: KnownIon,
  plane: string,
  axis: readonly [string, string],
): SplittingPattern | null => {
  const inPlane = findLigand(plane)
  const [above, below] = axis.map(findLigand)
  if (inPlane == null || above == null || below == null || ion.gPerCm === null) return null
  const deltaInPlanePerCm = inPlane.f * ion.gPerCm
  const deltaOnAxis = ((above.f + below.f) / 2) * ion.gPerCm
  const dtPerCm = ((4 / 7) * (deltaInPlanePerCm - deltaOnAxis)) / 10
  return {
    deltaInPlanePerCm,
    deltaCubicPerCm: deltaInPlanePerCm - (35 / 6) * dtPerCm,
    dtPerCm,
    pairBelowSinglePerCm: (35 / 4) * dtPerCm,
  }
}
