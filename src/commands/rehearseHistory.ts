import { ENGINE } from '../analysis/types.ts'
import type { Instrument } from '../config/types.ts'
import { type Subject, subjectOf, USUAL_PATH_MM } from '../daemon/context.ts'
import { absorbanceAt, curveOf, occasionsOfRows } from '../daemon/occasions.ts'
import { occasionsNeeded } from '../daemon/recipe.ts'
import type { RoomInForce } from '../daemon/room.ts'
import type { Curves } from '../rehearsal/injection.ts'
import { constantReference, referenceTimeline } from '../rehearsal/reference.ts'
import type { ReferenceTimeline, ReplayRow, ReplaySample } from '../rehearsal/types.ts'
import { typedReference } from '../series/index.ts'
import { wavenumberOfNm } from '../spectrum/index.ts'
import type { Db, Store } from '../store/index.ts'
import { storeOn } from '../store/index.ts'
import { type ReplaySpectrum, replay } from '../store/replay.ts'

/** A store opened for reading, with the queries of a rehearsal. */
export const historyOn = (db: Db) => ({ store: storeOn(db), replay: replay(db) })
export type History = ReturnType<typeof historyOn>

/** A sample as a rehearsal goes through it, with its subjects by instrument. */
export interface Rehearsed {
  readonly history: ReplaySample
  readonly subjects: Readonly<Record<string, Subject>>
}

/** Spectra at the most that the first occasions are made of, as in the daemon. */
const MOST_SPECTRA = 200

/** Null where no study of the configuration claims the sample, or its instruments are not in it any more. */
export const historyOf = (sample: string, until: number, room: RoomInForce, from: History): Rehearsed | null => {
  const { store, replay } = from
  const measuring = store.spectra.instrumentsOf(sample)
  const subjects = Object.fromEntries(
    room.config.instruments.flatMap((instrument) => {
      const subject = measuring.includes(instrument.name)
        ? subjectOf(sample, instrument, room.studyOf, room.config)
        : null
      return subject === null ? [] : [[instrument.name, subject] as const]
    }),
  )
  const [first] = Object.values(subjects)
  if (first === undefined) return null
  const rows = replay.ofSample(sample, ENGINE).flatMap((row) => {
    const subject = subjects[row.instrument]
    return subject === undefined || row.measuredAt > until ? [] : [rowOf(row, subject, store)]
  })
  const on = Object.entries(subjects).map(
    ([name, subject]) =>
      [name, { medium: subject.context.prepare.medium, reference: timelineOf(subject, from) }] as const,
  )
  const history = {
    sample,
    study: first.study,
    expected: first.species.bands,
    began: first.study.began ?? store.spectra.firstMeasuredAt(sample),
    on: Object.fromEntries(on),
    rows,
  }
  return { history, subjects }
}

const rowOf = (row: ReplaySpectrum, subject: Subject, store: Store): ReplayRow => ({
  ...row,
  absorbanceAt: curveOf(row.spectrum, subject, store),
})

/** Everything of claimed samples that an instrument measured, one at a time. */
export const rowsOfInstrument = function* (
  instrument: Instrument,
  until: number,
  { config, studyOf }: RoomInForce,
  { store, replay }: History,
): Generator<ReplayRow> {
  for (const row of replay.onInstrument(instrument.name, ENGINE)) {
    if (row.measuredAt > until) return
    const subject = subjectOf(row.sample, instrument, studyOf, config)
    if (subject !== null) yield rowOf(row, subject, store)
  }
}

/** The sample's own reference, another sample's, or values that were typed in. */
const timelineOf = (subject: Subject, { store, replay }: History): ReferenceTimeline => {
  const { reference } = subject.study
  if (reference.kind === 'values') return constantReference(typedReference(reference.values))
  const sample = reference.kind === 'sample' ? reference.sample : subject.sample
  const instrument = subject.instrument.name
  const of = { ...subject, sample }
  const recipe = store.recipes.of(sample, instrument)
  const frozen = replay
    .referenceSets(sample, instrument)
    .map((spectra) => occasionsOfRows(store.analyses.some(spectra, sample), of, store))
  const rows =
    recipe === null
      ? []
      : store.analyses.earliest({ sample, instrument, recipe: recipe.sha256, engine: ENGINE }, MOST_SPECTRA)
  const first = occasionsOfRows(rows, of, store)
  // a reference sample that is asked for early is complete with what there is of it
  const need =
    reference.kind === 'sample'
      ? Math.min(occasionsNeeded(subject), Math.max(1, first.length))
      : occasionsNeeded(subject)
  return referenceTimeline({ frozen, first, need, awaitsApproval: subject.study.approveReference === true })
}

/** The stored curves of a sample, and how they are fitted. */
export const curvesOf = (
  subjects: Rehearsed['subjects'],
  { store, replay }: History,
  onFitted: () => void,
): Curves => ({
  rawOf: (spectrum) => store.spectra.get(spectrum)?.raw ?? null,
  bandsOf: (spectrum) =>
    replay.bandsOf(spectrum).map(({ role, position_cm1, width_cm1, height }) => ({
      role,
      positionPerCm: position_cm1,
      widthPerCm: width_cm1,
      height,
    })),
  contextOf: (instrument) => subjects[instrument]?.context ?? null,
  recipeOf: (instrument) => {
    const subject = subjects[instrument]
    return subject === undefined ? null : store.recipes.of(subject.sample, instrument)
  },
  pathMmOf: (raw) => raw.pathMm ?? Object.values(subjects)[0]?.study.pathMm ?? USUAL_PATH_MM,
  absorbanceAt: (spectrum, nm) => absorbanceAt(spectrum, wavenumberOfNm(nm, spectrum.medium)),
  onFitted,
})
