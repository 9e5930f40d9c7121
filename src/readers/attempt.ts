/** What comes of reading a text under one dialect and one layout. */
import type { Fault } from '../fault.ts'
import type { Complaint } from './columns.ts'
import type { Dialect } from './rows.ts'
import type { RawSpectrum, ReadingHints } from './types.ts'

interface Tried {
  readonly dialect: Dialect
  /** Line of the first row. */
  readonly line: number
  /** In words: how the table lies. */
  readonly layout: string
}

export type Spectra = Tried & {
  readonly kind: 'spectra'
  readonly spectra: readonly RawSpectrum[]
  readonly warnings: readonly Fault[]
}

export type Faulty = Tried & {
  readonly kind: 'faulty'
  readonly fault: Fault
  readonly settle: readonly ReadingHints[]
}

export type Attempt = Spectra | Faulty

/** An attempt that failed at a place. */
export const faultyAt = (
  tried: Tried,
  place: Fault['place'],
  { code, what, remedy, settle }: Omit<Complaint, 'column'>,
): Faulty => ({ ...tried, kind: 'faulty', fault: { code, place, what, remedy }, settle: settle ?? [] })

/** The largest (sign 1) or smallest (sign −1) finite value, 0 where there is none. */
export const extreme = (values: Float64Array, sign: 1 | -1): number => {
  let most = -Infinity
  for (const v of values) if (Number.isFinite(v) && v * sign > most) most = v * sign
  return most === -Infinity ? 0 : most * sign
}
