import { occasionsOf } from '../series/index.ts'
import type { Occasion } from '../series/types.ts'
import { prepareSpectrum, wavenumberOfNm } from '../spectrum/index.ts'
import type { Spectrum } from '../spectrum/types.ts'
import type { WindowRow } from '../store/analyses.ts'
import type { Store } from '../store/index.ts'
import type { Subject } from './context.ts'

/** Stored spectra as occasions. A curve is fetched only when a rule asks for an absorbance. */
export const occasionsOfRows = (rows: readonly WindowRow[], subject: Subject, store: Store): readonly Occasion[] =>
  occasionsOf(
    rows.map((row) => ({ ...row, absorbanceAt: curveOf(row.spectrum, subject, store) })),
    subject.study.replicatesWithinMs,
  )

/** Absorbance of a stored spectrum at a wavelength as measured, nm; the curve is fetched when it is first asked for. */
export const curveOf = (id: number, { context }: Subject, store: Store): ((nm: number) => number | null) => {
  let spectrum: Spectrum | null | undefined
  return (nm) => {
    if (spectrum === undefined) {
      const stored = store.spectra.get(id)
      const prepared = stored === null ? null : prepareSpectrum(stored.raw, context.prepare)
      spectrum = prepared?.kind === 'prepared' ? prepared.spectrum : null
    }
    return spectrum === null ? null : absorbanceAt(spectrum, wavenumberOfNm(nm, spectrum.medium))
  }
}

/** Linear between the neighbouring points; null outside the window and beside points that were masked. */
export const absorbanceAt = ({ wavenumberPerCm: x, absorbance: y, used }: Spectrum, perCm: number): number | null => {
  let low = 0
  let high = x.length - 1
  if (high < 1 || !(perCm >= x[low]! && perCm <= x[high]!)) return null
  while (high - low > 1) {
    const middle = (low + high) >> 1
    if (x[middle]! <= perCm) low = middle
    else high = middle
  }
  if (used[low] !== 1 || used[high] !== 1) return null
  const part = (perCm - x[low]!) / (x[high]! - x[low]!)
  return y[low]! + part * (y[high]! - y[low]!)
}
