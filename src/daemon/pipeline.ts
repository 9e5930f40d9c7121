import type { Logger } from 'pino'
import { type Identity, identify, unprepared } from '../analysis/index.ts'
import type { Analysis, LockedRecipe } from '../analysis/types.ts'
import type { Instrument } from '../config/types.ts'
import { sayFault } from '../fault.ts'
import type { RawSpectrum, Reading } from '../readers/types.ts'
import type { StoredArrival } from '../store/arrivals.ts'
import type { Store } from '../store/index.ts'
import { type Subject, subjectOf } from './context.ts'
import { isStorageFault, type Kept, keep } from './keep.ts'
import type { Pool, WorkerFailure } from './pool.ts'
import { recipeInForce, settleRecipe } from './recipe.ts'
import type { RoomInForce } from './room.ts'

/** What the stations of the pipeline work with. The clock comes in as a function. */
export interface Stations {
  readonly store: Store
  readonly pool: Pool
  readonly log: Logger
  readonly now: () => number
  /** The configuration in force; a reload changes what it returns. */
  readonly room: () => RoomInForce
  /** A spectrum and its outcome were committed. */
  readonly onKept: (kept: Kept) => void
}

/** A spectrum on its way from reading to its outcome. */
export interface SpectrumInHand {
  readonly raw: RawSpectrum
  readonly identity: Identity
  /** Null for a sample that no study claims. */
  readonly subject: Subject | null
}

/** What became of one arrival, ready to be committed. */
export type ArrivalInHand =
  | { readonly kind: 'repeated'; readonly arrival: StoredArrival; readonly reason: string }
  | { readonly kind: 'rejected'; readonly arrival: StoredArrival; readonly reason: string }
  | {
      readonly kind: 'read'
      readonly arrival: StoredArrival
      readonly spectra: readonly SpectrumInHand[]
      /** Why some spectra of the file could not be read; null when all could. */
      readonly reason: string | null
    }

export interface Analysed {
  readonly analysis: Analysis
  readonly recipe: string | null
}

/** How many arrivals are read ahead and committed together when there is a backlog. */
const AT_ONCE = 64

/**
 * Takes every arrival without an outcome, in order of arrival: read → fit → derive → keep → judge.
 * Reading and fitting run ahead in the workers; outcomes are committed in order, whatever worker finished first.
 */
export const processPending = async (stations: Stations): Promise<number> => {
  let done = 0
  for (;;) {
    const batch = stations.store.arrivals.pending(AT_ONCE)
    if (batch.length === 0) return done
    const readings = batch.map((arrival) => readArrival(arrival, stations))
    // each is awaited in its turn below; until then a failure must not pass for one that nobody awaits
    for (const reading of readings) reading.catch(() => undefined)
    let group: { inHand: ArrivalInHand; analyses: Promise<readonly (Analysed | null)[]> }[] = []
    const commitGroup = async (): Promise<void> => {
      const ready: { inHand: ArrivalInHand; analyses: readonly (Analysed | null)[] }[] = []
      for (const { inHand, analyses } of group) ready.push({ inHand, analyses: await analyses })
      group = []
      keep(ready, stations)
    }
    for (const reading of readings) {
      const inHand = await reading
      if (inHand.kind === 'read' && inHand.spectra.some((one) => needsItsTurn(one, stations))) {
        await commitGroup()
        await takeInTurn(inHand, stations)
      } else {
        group.push({ inHand, analyses: inHand.kind === 'read' ? analyseLocked(inHand, stations) : Promise.resolve([]) })
      }
    }
    await commitGroup()
    done += batch.length
  }
}

/** While a sample's recipe is not locked, its next spectrum depends on the one before. */
const needsItsTurn = ({ subject }: SpectrumInHand, { store }: Stations): boolean =>
  subject !== null && store.recipes.of(subject.sample, subject.instrument.name)?.locked !== true

const analyseLocked = (
  inHand: Extract<ArrivalInHand, { kind: 'read' }>,
  stations: Stations,
): Promise<readonly (Analysed | null)[]> =>
  Promise.all(
    inHand.spectra.map(async (one) => {
      const state = one.subject === null ? null : recipeInForce(one.subject, stations)
      return one.subject === null || state === null
        ? null
        : analyseOne(one, one.subject, state.recipe, state.sha256, stations)
    }),
  )

/** One arrival of a sample whose recipe is still open: choose, fit, commit, and lock when the reference is complete. */
const takeInTurn = async (inHand: Extract<ArrivalInHand, { kind: 'read' }>, stations: Stations): Promise<void> => {
  const analyses: (Analysed | null)[] = []
  for (const one of inHand.spectra) {
    if (one.subject === null) {
      analyses.push(null)
      continue
    }
    await settleRecipe(one.subject, stations)
    const state = recipeInForce(one.subject, stations)
    analyses.push(await analyseOne(one, one.subject, state?.recipe ?? 'choose', state?.sha256 ?? null, stations))
  }
  keep([{ inHand, analyses }], stations)
  for (const { subject } of inHand.spectra) if (subject !== null) await settleRecipe(subject, stations)
}

const analyseOne = async (
  { raw }: SpectrumInHand,
  subject: Subject,
  recipe: LockedRecipe | 'choose',
  sha256: string | null,
  { pool }: Stations,
): Promise<Analysed> => {
  const result = await pool.fit({ raws: [raw], context: subject.context, recipe })
  if ('kind' in result) return { analysis: failedAnalysis(raw, result), recipe: sha256 }
  return { analysis: result.analyses[0]!, recipe: sha256 }
}

const failedAnalysis = (raw: RawSpectrum, { why }: WorkerFailure): Analysis =>
  unprepared(raw, [{ code: 'worker', place: { at: 'fit' }, what: why, remedy: 'look at the spectrum by hand' }])

/** A file never stops the daemon: whatever goes wrong with it, short of the disk, sets it aside with the reason. */
const readArrival = async (arrival: StoredArrival, stations: Stations): Promise<ArrivalInHand> => {
  try {
    return await readWhole(arrival, stations)
  } catch (error) {
    if (isStorageFault(error)) throw error
    stations.log.error({ err: error, arrival: arrival.id }, 'a file could not be read')
    const reason = `it could not be read: ${error instanceof Error ? error.message : String(error)}`
    return { kind: 'rejected', arrival, reason }
  }
}

const readWhole = async (arrival: StoredArrival, stations: Stations): Promise<ArrivalInHand> => {
  const { store, pool } = stations
  const { config, studyOf } = stations.room()
  const same = store.arrivals.sameBefore(arrival)
  if (same !== null) return { kind: 'repeated', arrival, reason: `the same bytes came before, as arrival ${same.id}` }
  const instrument = config.instruments.find(({ name }) => name === arrival.instrument)
  if (instrument === undefined)
    return { kind: 'rejected', arrival, reason: `no instrument ${arrival.instrument} in the configuration any more` }
  const bytes = store.arrivals.bytesOf(arrival.sha256)
  const reading = await pool.read({ bytes, file: arrival.file, hints: instrument.reading })
  const spectraRead = reading.kind === 'failed' ? [] : reading.spectra
  const reason = reasonOf(reading)
  if (spectraRead.length === 0) return { kind: 'rejected', arrival, reason: reason ?? 'the file holds no spectrum' }
  return {
    kind: 'read',
    arrival,
    reason,
    spectra: spectraRead.map((raw) => inHandOf(raw, arrival, instrument, stations, studyOf)),
  }
}

const inHandOf = (
  raw: RawSpectrum,
  arrival: StoredArrival,
  instrument: Instrument,
  { room }: Stations,
  studyOf: RoomInForce['studyOf'],
): SpectrumInHand => {
  const { config } = room()
  const file = { path: arrival.file, mtimeMs: arrival.mtimeMs, timeZone: config.timeZone }
  const identity = identify(raw, file, instrument)
  return { raw, identity, subject: subjectOf(identity.sample, instrument, studyOf, config) }
}

const reasonOf = (reading: Reading | WorkerFailure): string | null => {
  if (reading.kind === 'failed') return reading.why
  return reading.kind === 'refused' ? reading.faults.map(sayFault).join('\n') : null
}
