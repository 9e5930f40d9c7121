import { mean, uOfMean } from './statistics.ts'
import type { Occasion } from './types.ts'

/** One stored spectrum of a sample: its numbers in the units of the rule language, each with its standard uncertainty. */
export interface SpectrumRow {
  readonly spectrum: number
  readonly measuredAt: number
  readonly receivedAt: number
  readonly quantities: Readonly<Record<string, readonly [value: number | null, u: number | null]>>
  /** Absorbance at a wavelength in nm as measured; absent: none can be had. */
  readonly absorbanceAt?: (nm: number) => number | null
}

/**
 * Spectra as occasions: those measured within `replicatesWithinMs` of the first are replicates of one occasion, whose
 * values are their means and whose time is the first's. Null: every spectrum is an occasion. Ascending in time,
 * whatever the order of the rows. The uncertainty of a mean is the larger of that predicted by the replicates'
 * uncertainties and that observed in their scatter.
 */
export const occasionsOf = (
  spectra: readonly SpectrumRow[],
  replicatesWithinMs: number | null,
): readonly Occasion[] => {
  const rows = spectra.toSorted((a, b) => a.measuredAt - b.measuredAt || a.spectrum - b.spectrum)
  const groups: SpectrumRow[][] = []
  for (const row of rows) {
    const group = groups.at(-1)
    const replicate =
      group !== undefined && replicatesWithinMs !== null && row.measuredAt - group[0]!.measuredAt <= replicatesWithinMs
    if (replicate) group.push(row)
    else groups.push([row])
  }
  return groups.map(occasionOf)
}

const occasionOf = (rows: readonly SpectrumRow[]): Occasion => {
  const [first, ...others] = rows
  const shared = {
    at: first!.measuredAt,
    receivedAt: Math.max(...rows.map(({ receivedAt }) => receivedAt)),
    spectra: rows.map(({ spectrum }) => spectrum),
    absorbanceAt: (nm: number) => meanOrNull(rows.map(({ absorbanceAt }) => absorbanceAt?.(nm) ?? null)),
  }
  const names = others.length === 0 ? Object.keys(first!.quantities) : allNames(rows)
  const values: Record<string, number | null> = {}
  const u: Record<string, number | null> = {}
  for (const name of names) {
    const averaged = average(rows, name)
    values[name] = averaged.value
    u[name] = averaged.u
  }
  return { ...shared, values, u }
}

const allNames = (rows: readonly SpectrumRow[]): readonly string[] => [
  ...new Set(rows.flatMap(({ quantities }) => Object.keys(quantities))),
]

/** Replicates that lack the value are left out. */
const average = (rows: readonly SpectrumRow[], name: string) => {
  const found = rows.flatMap(({ quantities }) => {
    const [value, u] = quantities[name] ?? [null, null]
    return value === null ? [] : [{ value, u }]
  })
  if (found.length === 0) return { value: null, u: null }
  const values = found.map(({ value }) => value)
  return {
    value: mean(values),
    u: uOfMean(
      values,
      found.map(({ u }) => u),
    ),
  }
}

/** The spectra must all have a value at the place, or the mean would jump where one ends. */
export const meanOrNull = (values: readonly (number | null)[]): number | null =>
  values.length > 0 && values.every((x) => x !== null) ? mean(values as readonly number[]) : null
