import type { Window } from '../series/types.ts'
import type { Evidence } from './types.ts'
import type { Series } from './windows.ts'

/** The figures of the occasion judged, in the units in which they are told. */
export const evidenceOf = (series: readonly Series[], window: Window): readonly Evidence[] => {
  const last = window.occasions.length - 1
  const occasion = window.occasions[last]
  const reference = window.reference.kind === 'ready' ? window.reference : null
  return series.map((one) => ({
    name: one.name,
    unit: one.unit,
    value: occasion === undefined ? null : finite(one.read(window, last)),
    u: occasion === undefined || !one.measured ? null : finite(one.uncertainty(occasion)),
    reference: reference === null || !one.measured ? null : finite(one.referenceValue(reference)),
    uReference: reference === null || !one.measured ? null : finite(one.referenceUncertainty(reference)),
  }))
}

const finite = (x: number | null): number | null => (x !== null && Number.isFinite(x) ? x : null)
