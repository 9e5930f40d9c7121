import type { Analysis } from '../analysis/types.ts'
import type { StoredArrival } from '../store/arrivals.ts'
import type { Subject } from './context.ts'
import { judge } from './judge.ts'
import { keepAnalysis } from './keepAnalysis.ts'
import type { Analysed, ArrivalInHand, SpectrumInHand, Stations } from './pipeline.ts'

/** A spectrum that was kept, for whoever watches. */
export interface Kept {
  readonly spectrum: number
  readonly arrival: number
  readonly sample: string | null
}

export interface ReadyToKeep {
  readonly inHand: ArrivalInHand
  /** One per spectrum of the arrival; null for a sample that no study claims. */
  readonly analyses: readonly (Analysed | null)[]
}

/**
 * The outcome of these arrivals, in their order, in one transaction: analyses, rule outcomes, alarm changes and
 * letters together. A savepoint each: what goes wrong with one arrival sets that one aside and not the others.
 */
export const keep = (ready: readonly ReadyToKeep[], stations: Stations): void => {
  if (ready.length === 0) return
  const { store, log, onKept } = stations
  const kept = store.atomically(() =>
    ready.flatMap((one) => {
      try {
        return store.atomically(() => keepArrival(one, stations))
      } catch (error) {
        if (isStorageFault(error)) throw error // the disk's fault, not the file's: the whole commit is tried again
        log.error({ err: error, arrival: one.inHand.arrival.id }, 'an outcome could not be kept')
        const reason = `its outcome could not be kept: ${error instanceof Error ? error.message : String(error)}`
        store.arrivals.addOutcome(one.inHand.arrival.id, 'rejected', reason, stations.now())
        return []
      }
    }),
  )
  kept.forEach(onKept)
}

/** Disk full, input/output error, busy, read-only: everything that may be mended without touching the file. */
export const isStorageFault = (error: unknown): boolean =>
  /^SQLITE_(FULL|IOERR|BUSY|LOCKED|READONLY|CANTOPEN|NOMEM|CORRUPT)/.test((error as { code?: string }).code ?? '')

const keepArrival = ({ inHand, analyses }: ReadyToKeep, stations: Stations): readonly Kept[] => {
  const { store, now } = stations
  const { arrival } = inHand
  if (inHand.kind !== 'read') {
    store.arrivals.addOutcome(arrival.id, inHand.kind, inHand.reason, now())
    if (inHand.kind === 'rejected') supersedeEarlier(arrival, stations)
    return []
  }
  supersedeEarlier(arrival, stations)
  const kept = inHand.spectra.map((one, i) => keepSpectrum(arrival, one, analyses[i] ?? null, stations))
  store.arrivals.addOutcome(arrival.id, 'stored', inHand.reason, now())
  return kept
}

/** A file that grew: the later version begins with the old bytes and takes the place of the earlier one. */
const supersedeEarlier = (arrival: StoredArrival, { store, now }: Stations): void => {
  const earlier = store.arrivals.before(arrival)
  if (earlier === null || earlier.sha256 === arrival.sha256) return
  const old = store.arrivals.bytesOf(earlier.sha256)
  const fresh = store.arrivals.bytesOf(arrival.sha256)
  if (old.length >= fresh.length || Buffer.compare(old, fresh.subarray(0, old.length)) !== 0) return
  store.arrivals.addOutcome(earlier.id, 'superseded', `arrival ${arrival.id} continues this file`, now())
}

const keepSpectrum = (
  arrival: StoredArrival,
  { raw, identity, subject }: SpectrumInHand,
  analysed: Analysed | null,
  stations: Stations,
): Kept => {
  const { store } = stations
  const spectrum = store.spectra.add(arrival.id, arrival.instrument, raw, identity)
  const kept = { spectrum, arrival: arrival.id, sample: identity.sample }
  if (subject === null || analysed === null) return kept
  const analysis = withFlags(analysed.analysis, identity)
  const recipe = analysed.recipe ?? chosenJustNow(spectrum, subject, analysis, stations)
  keepAnalysis(spectrum, raw, subject, analysis, recipe, stations)
  judge({ spectrum, arrival, identity, subject, analysis, recipe }, stations)
  return kept
}

/** The first spectrum of a sample brings the recipe that was chosen on it. */
export const chosenJustNow = (
  spectrum: number,
  { sample, instrument }: Subject,
  { locked }: Analysis,
  { store, now }: Stations,
): string | null =>
  locked === null
    ? null
    : store.recipes.choose(sample, instrument.name, locked, {
        locked: false,
        spectra: [spectrum],
        why: 'chosen on the first spectrum of the sample',
        at: now(),
      })

const withFlags = (analysis: Analysis, { flags, remarks }: SpectrumInHand['identity']): Analysis => ({
  ...analysis,
  flags: [...new Set([...analysis.flags, ...flags])],
  remarks: [...remarks, ...analysis.remarks],
})
