import type { RoomInForce } from '../daemon/room.ts'
import { type Detection, detections } from '../rehearsal/detection.ts'
import { type Injection, injectInto } from '../rehearsal/injection.ts'
import { productOf } from '../rehearsal/product.ts'
import { replayInstrument, replaySample } from '../rehearsal/replay.ts'
import type { Replayed } from '../rehearsal/types.ts'
import type { CompiledRule } from '../rules/types.ts'
import { curvesOf, type History, historyOf, type Rehearsed, rowsOfInstrument } from './rehearseHistory.ts'

/** One of the rule sets that are rehearsed, and what came of it. */
export interface RuleSet {
  /** The file or folder it comes from. */
  readonly from: string
  readonly rules: readonly CompiledRule[]
}

export interface Asked {
  /** Whether a sample is meant. */
  readonly isMeant: (sample: string) => boolean
  /** Rules of instruments look at everything an instrument measured: only where all samples are meant. */
  readonly withInstruments: boolean
  readonly since: number
  readonly until: number
  readonly injection: Injection | null
}

export interface Rehearsal {
  readonly spectra: number
  readonly samples: readonly string[]
  readonly instruments: readonly string[]
  /** Samples that no study claims. */
  readonly unclaimed: readonly string[]
  /** First and last spectrum counted, epoch milliseconds; null where there is none. */
  readonly from: number | null
  readonly to: number | null
  /** In the order of the rule sets. */
  readonly replays: readonly (readonly Replayed[])[]
  readonly detections: readonly (readonly Detection[])[]
  readonly injected: readonly { readonly sample: string; readonly spectra: number; readonly product: string }[]
  /** Samples into which nothing could be injected. */
  readonly skipped: readonly { readonly sample: string; readonly why: string }[]
}

/** Goes through everything stored once, under one or two rule sets. `onSpectrum` is told of progress. */
export const runRehearsal = (
  sets: readonly RuleSet[],
  asked: Asked,
  room: RoomInForce,
  history: History,
  onProgress: (what: string) => void,
): Rehearsal => {
  const places = history.replay.places().filter(({ sample }) => asked.isMeant(sample))
  const names = [...new Set(places.map(({ sample }) => sample))]
  const out = {
    samples: [] as string[],
    unclaimed: [] as string[],
    replays: sets.map((): Replayed[] => []),
    detections: sets.map((): Detection[] => []),
    injected: [] as Rehearsal['injected'][number][],
    skipped: [] as Rehearsal['skipped'][number][],
  }
  const counted: number[] = []
  names.forEach((sample, i) => {
    onProgress(`${i + 1} of ${names.length} samples`)
    const one = historyOf(sample, asked.until, room, history)
    if (one === null) {
      out.unclaimed.push(sample)
      return
    }
    out.samples.push(sample)
    for (const { measuredAt } of one.history.rows) if (measuredAt >= asked.since) counted.push(measuredAt)
    sets.forEach(({ rules }, k) => void out.replays[k]!.push(replaySample(one.history, rules, asked)))
    if (asked.injection === null) return
    const change = changed(one, asked.injection, sets, history, () => onProgress(`changing spectra of ${sample}`))
    if (change.kind === 'skipped') out.skipped.push({ sample, why: change.why })
    else {
      out.injected.push({ sample, spectra: change.spectra, product: change.product })
      change.detections.forEach((found, k) => void out.detections[k]!.push(...found))
    }
  })
  const instruments = room.config.instruments.filter(({ name }) => places.some(({ instrument }) => instrument === name))
  if (asked.withInstruments)
    for (const instrument of instruments) {
      onProgress(`instrument ${instrument.name}`)
      sets.forEach(({ rules }, k) => {
        const rows = rowsOfInstrument(instrument, asked.until, room, history)
        const medium = instrument.reading.medium ?? 'air'
        const studyOf = (sample: string) => room.studyOf(sample)?.name ?? null
        out.replays[k]!.push(replayInstrument({ instrument: instrument.name, medium, studyOf, rows }, rules, asked))
      })
    }
  return {
    ...out,
    spectra: counted.length,
    instruments: instruments.map(({ name }) => name),
    from: counted.reduce<number | null>((least, at) => (least === null ? at : Math.min(least, at)), null),
    to: counted.reduce<number | null>((most, at) => (most === null ? at : Math.max(most, at)), null),
  }
}

const changed = (
  { history, subjects }: Rehearsed,
  injection: Injection,
  sets: readonly RuleSet[],
  from: History,
  onFitted: () => void,
) => {
  const product = productOf(Object.values(subjects)[0]!.species, injection.exchange)
  if (product.kind === 'none') return { kind: 'skipped', why: product.why } as const
  const injected = injectInto(history, product, injection, curvesOf(subjects, from, onFitted))
  if (injected.kind === 'skipped') return injected
  const found = sets.map(({ rules }) =>
    detections(injected, injection, rules, replaySample(history, rules), replaySample(injected.history, rules)),
  )
  const said = Object.entries(product.ligands).map(([name, n]) => `${n} ${name}`)
  return {
    kind: 'injected',
    detections: found,
    spectra: injected.spectra,
    product: `${said.join(', ')} (bands by ${product.from})`,
  } as const
}
