import type { Measured } from '../analysis/quantities.ts'
import { IN_STATISTICS } from './decisions.ts'
import type { Db } from './open.ts'

/** A stored spectrum with its newest analysis, as rules are rehearsed on it. */
export interface ReplaySpectrum {
  readonly spectrum: number
  readonly sample: string
  readonly instrument: string
  readonly measuredAt: number
  readonly receivedAt: number
  /** Hash of the recipe it was fitted with; null where none could be chosen. */
  readonly recipe: string | null
  readonly fit: 'fitted' | 'no-band' | 'unfitted'
  readonly quantities: Readonly<Record<string, Measured>>
}

interface Row {
  spectrum: number
  sample: string
  instrument: string
  measured_at: number
  received_at: number
  recipe: string | null
  fitted: 0 | 1
  flags: string
  quantities: string
}

/** A band of a stored analysis. cm⁻¹, absorbance. */
export interface StoredBand {
  readonly role: string | null
  readonly position_cm1: number
  readonly width_cm1: number
  /** Null for what lies beyond the window. */
  readonly height: number | null
}

const REPLAY = `
  SELECT s.id AS spectrum, s.sample, s.instrument, s.measured_at, r.received_at, a.recipe, a.flags, a.quantities,
         a.body -> '$.fit' IS NOT 'null' AS fitted
  FROM spectrum_now s JOIN arrival r ON r.id = s.arrival
  JOIN analysis a ON a.id = (SELECT max(id) FROM analysis WHERE spectrum = s.id AND id > s.analysed_before)
  WHERE s.sample IS NOT NULL AND a.engine = @engine AND ${IN_STATISTICS}`

const fromRow = (row: Row): ReplaySpectrum => ({
  spectrum: row.spectrum,
  sample: row.sample,
  instrument: row.instrument,
  measuredAt: row.measured_at,
  receivedAt: row.received_at,
  recipe: row.recipe,
  fit: row.fitted === 1 ? 'fitted' : (JSON.parse(row.flags) as string[]).includes('no-band') ? 'no-band' : 'unfitted',
  quantities: JSON.parse(row.quantities) as ReplaySpectrum['quantities'],
})

/** Stored history in the order of measurement, to be gone through once more. Reads only. */
export const replay = (db: Db) => {
  const ofSample = db.prepare<{ sample: string; engine: string }, Row>(
    `${REPLAY} AND s.sample = @sample ORDER BY s.measured_at, s.id`,
  )
  const onInstrument = db.prepare<{ instrument: string; engine: string }, Row>(
    `${REPLAY} AND s.instrument = @instrument ORDER BY s.measured_at, s.id`,
  )
  const samples = db.prepare<[], { sample: string; instrument: string; n: number }>(
    `SELECT sample, instrument, count(*) AS n FROM spectrum_now WHERE sample IS NOT NULL
      GROUP BY sample, instrument ORDER BY sample, instrument`,
  )
  const sets = db.prepare<[string, string], { spectra: string }>(
    `SELECT spectra FROM reference_set WHERE sample = ? AND instrument = ? ORDER BY id`,
  )
  const bands = db.prepare<[number], { bands: string }>(
    `SELECT a.body -> '$.bands' AS bands FROM spectrum_now s
       JOIN analysis a ON a.id = (SELECT max(id) FROM analysis WHERE spectrum = s.id AND id > s.analysed_before)
      WHERE s.id = ?`,
  )

  return {
    /** Every sample on every instrument, with the number of its spectra. */
    places: (): readonly { readonly sample: string; readonly instrument: string; readonly n: number }[] =>
      samples.all(),

    /** Excluded and superseded spectra, those without an analysis and those of another engine are left out. */
    ofSample: (sample: string, engine: string): readonly ReplaySpectrum[] =>
      ofSample.all({ sample, engine }).map(fromRow),

    /** The same, whatever the sample, one at a time. */
    onInstrument: function* (instrument: string, engine: string): Generator<ReplaySpectrum> {
      for (const row of onInstrument.iterate({ instrument, engine })) yield fromRow(row)
    },

    /** Every reference that was ever frozen, oldest first, as numbers of spectra. */
    referenceSets: (sample: string, instrument: string): readonly (readonly number[])[] =>
      sets.all(sample, instrument).map(({ spectra }) => JSON.parse(spectra) as number[]),

    bandsOf: (spectrum: number): readonly StoredBand[] =>
      JSON.parse(bands.get(spectrum)?.bands ?? '[]') as StoredBand[],
  }
}
