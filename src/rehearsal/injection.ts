import { analyse } from '../analysis/analyse.ts'
import { quantitiesOf } from '../analysis/quantities.ts'
import type { AnalysisContext, LockedRecipe } from '../analysis/types.ts'
import type { RawSpectrum } from '../readers/types.ts'
import type { Spectrum } from '../spectrum/types.ts'
import { type FittedBand, movedBands, withProduct } from './inject.ts'
import type { Exchange, Product } from './product.ts'
import { referenceAt } from './reference.ts'
import type { ReplayRow, ReplaySample } from './types.ts'

/** A made-up conversion: what into, how much of it at the end (0 to 1), and how it comes. */
export interface Injection {
  readonly exchange: Exchange
  readonly part: number
  /** `linear`: grows from nothing at the middle of the history to all at its end; `step`: all of it from the middle on. */
  readonly course: 'linear' | 'step'
}

/** `H2O:1=5%`: one ligand replaced by water, five percent converted. Null where the text says no such thing. */
export const parseInjection = (text: string): Omit<Injection, 'course'> | null => {
  const parts = /^\s*([^\s:=]+)\s*:\s*([1-9]\d?)\s*=\s*(\d+(?:\.\d+)?)\s*%\s*$/.exec(text)
  const percent = Number(parts?.[3])
  if (parts === null || !(percent > 0 && percent <= 100)) return null
  return { exchange: { ligand: parts[1]!, count: Number(parts[2]) }, part: percent / 100 }
}

/** Where the stored curves come from, and how they are fitted. */
export interface Curves {
  readonly rawOf: (spectrum: number) => RawSpectrum | null
  /** Bands of the stored analysis, in the order of the recipe's components. */
  readonly bandsOf: (spectrum: number) => readonly Omit<FittedBand, 'component'>[]
  readonly contextOf: (instrument: string) => AnalysisContext | null
  /** The recipe in force, with its hash. */
  readonly recipeOf: (instrument: string) => { readonly sha256: string; readonly recipe: LockedRecipe } | null
  readonly pathMmOf: (raw: RawSpectrum) => number
  readonly absorbanceAt: (spectrum: Spectrum, nm: number) => number | null
  /** Told after each spectrum that was fitted again. */
  readonly onFitted: () => void
}

export type Injected =
  | {
      readonly kind: 'injected'
      readonly history: ReplaySample
      /** Beginning of the change, and end of the history. Epoch milliseconds. */
      readonly from: number
      readonly to: number
      /** Spectra that were changed and fitted again. */
      readonly spectra: number
    }
  | { readonly kind: 'skipped'; readonly why: string }

/** The part converted at a time. */
export const partAt = ({ part, course }: Injection, from: number, to: number, at: number): number =>
  at < from ? 0 : course === 'step' || to <= from ? part : part * Math.min(1, (at - from) / (to - from))

/** A sample's history with a made-up change from its middle on, each changed spectrum fitted again by its locked recipe. */
export const injectInto = (
  history: ReplaySample,
  product: Extract<Product, { kind: 'product' }>,
  injection: Injection,
  curves: Curves,
): Injected => {
  const { rows, on } = history
  const from = rows[Math.floor(rows.length / 2)]?.measuredAt
  const to = rows.at(-1)?.measuredAt
  if (from === undefined || to === undefined || to <= from)
    return { kind: 'skipped', why: 'it has no history to change' }
  const states = Object.values(on).map(({ reference }) => referenceAt(reference, from))
  if (!states.some(({ kind }) => kind === 'ready')) return { kind: 'skipped', why: whyNotReady(states[0]) }
  let spectra = 0
  const changed = rows.map((row) => {
    const part = partAt(injection, from, to, row.measuredAt)
    const again = part > 0 ? fittedAgain(row, product, part, curves) : null
    if (again !== null) spectra += 1
    return again ?? row
  })
  if (spectra === 0) return { kind: 'skipped', why: 'none of its later spectra has a band that the product moves' }
  return { kind: 'injected', history: { ...history, rows: changed }, from, to, spectra }
}

const whyNotReady = (state: ReturnType<typeof referenceAt> | undefined): string =>
  state?.kind === 'refused'
    ? `its reference is refused: ${state.why}`
    : 'its reference is not complete by the middle of its history'

/** Null where the spectrum was not fitted by the recipe in force, or has no band that moves: it stays as it is. */
const fittedAgain = (
  row: ReplayRow,
  product: Extract<Product, { kind: 'product' }>,
  part: number,
  curves: Curves,
): ReplayRow | null => {
  const state = curves.recipeOf(row.instrument)
  const context = curves.contextOf(row.instrument)
  if (state === null || context === null || row.recipe !== state.sha256 || row.fit !== 'fitted') return null
  const { components } = state.recipe.recipe
  const bands = curves
    .bandsOf(row.spectrum)
    .flatMap((band, i) => (components[i] === undefined ? [] : [{ ...band, component: components[i] }]))
  const moved = movedBands(bands, product)
  const raw = moved.length === 0 ? null : curves.rawOf(row.spectrum)
  if (raw === null) return null
  const changed = withProduct(raw, moved, part, context.prepare)
  const outcome = analyse(changed, context, state.recipe)
  curves.onFitted()
  if (outcome.kind === 'refused') return { ...row, fit: 'unfitted', quantities: {}, absorbanceAt: () => null }
  const { fit, spectrum } = outcome.analysis
  return {
    ...row,
    fit: fit.kind === 'fitted' ? 'fitted' : fit.flags.includes('no-band') ? 'no-band' : 'unfitted',
    quantities: quantitiesOf(outcome.analysis, curves.pathMmOf(raw)),
    absorbanceAt: (nm) => (spectrum === null ? null : curves.absorbanceAt(spectrum, nm)),
  }
}
