// What a worker thread does: bytes in, plain data out. It knows no database, no clock and no other file.
import { analyse, lockRecipe, unprepared } from '../analysis/index.ts'
import type { Analysis, AnalysisContext, LockedRecipe } from '../analysis/types.ts'
import { readSpectra } from '../readers/index.ts'
import type { RawSpectrum, Reading, ReadingHints } from '../readers/types.ts'
import { prepareSpectrum } from '../spectrum/index.ts'

export interface ReadJob {
  readonly bytes: Uint8Array
  readonly file: string
  readonly hints: ReadingHints
}

export interface FitJob {
  readonly raws: readonly RawSpectrum[]
  readonly context: AnalysisContext
  /** `choose`: one recipe for all of them together. */
  readonly recipe: LockedRecipe | 'choose'
}

export interface FitResult {
  readonly analyses: readonly Analysis[]
  /** The recipe that was used or chosen; null where none could be. */
  readonly locked: LockedRecipe | null
}

export const read = ({ bytes, file, hints }: ReadJob): Reading => readSpectra(bytes, file, hints)

export const fit = ({ raws, context, recipe }: FitJob): FitResult => {
  const locked = recipe === 'choose' ? chooseFor(raws, context) : recipe
  return { analyses: raws.map((raw) => analyseOne(raw, context, locked)), locked }
}

const chooseFor = (raws: readonly RawSpectrum[], context: AnalysisContext): LockedRecipe | null => {
  const prepared = raws.flatMap((raw) => {
    const outcome = prepareSpectrum(raw, context.prepare)
    return outcome.kind === 'prepared' ? [outcome.spectrum] : []
  })
  if (prepared.length === 0) return null
  const choice = lockRecipe(prepared, context)
  return 'why' in choice ? null : choice
}

const analyseOne = (raw: RawSpectrum, context: AnalysisContext, locked: LockedRecipe | null): Analysis => {
  const outcome = analyse(raw, context, locked)
  return outcome.kind === 'analysed' ? outcome.analysis : unprepared(raw, outcome.faults)
}
