import { deflateRawSync, inflateRawSync } from 'node:zlib'
import type { Identity } from '../analysis/identify.ts'
import type { RawSpectrum } from '../readers/types.ts'
import type { Flag } from '../spectrum/types.ts'
import type { Db } from './open.ts'

export interface StoredSpectrum {
  readonly id: number
  readonly arrival: number
  readonly instrument: string
  /** As the file says, or as a person has mended it. */
  readonly sample: string | null
  readonly measuredAt: number
  /** Of its identity: `time-from-file-date`. */
  readonly flags: readonly Flag[]
  readonly raw: RawSpectrum
}

interface SpectrumRow {
  id: number
  arrival: number
  instrument: string
  sample: string | null
  measured_at: number
  as_read: string
  x: Buffer
  y: Buffer
  flags: string
}

const deflated = (values: Float64Array): Buffer =>
  deflateRawSync(Buffer.from(values.buffer, values.byteOffset, values.byteLength), { level: 6 })

const inflated = (blob: Buffer): Float64Array => {
  const bytes = inflateRawSync(blob)
  return new Float64Array(bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.byteLength))
}

const fromRow = (row: SpectrumRow): StoredSpectrum => ({
  id: row.id,
  arrival: row.arrival,
  instrument: row.instrument,
  sample: row.sample,
  measuredAt: row.measured_at,
  flags: JSON.parse(row.flags) as Flag[],
  raw: { ...(JSON.parse(row.as_read) as Omit<RawSpectrum, 'x' | 'y'>), x: inflated(row.x), y: inflated(row.y) },
})

/** Spectra as their files hold them. */
export const spectra = (db: Db) => {
  const add = db.prepare(
    `INSERT INTO spectrum (arrival, position, instrument, sample, measured_at, as_read, x, y, flags)
     VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)`,
  )
  const one = db.prepare<[number], SpectrumRow>(
    `SELECT id, arrival, instrument, sample, measured_at, as_read, x, y, flags FROM spectrum_now WHERE id = ?`,
  )
  const first = db.prepare<[string], { at: number | null }>(
    `SELECT min(measured_at) AS at FROM spectrum_now WHERE sample = ?`,
  )
  const lastReceived = db.prepare<[], { sample: string; received_at: number }>(
    `SELECT s.sample, max(r.received_at) AS received_at FROM spectrum_now s JOIN arrival r ON r.id = s.arrival
      WHERE s.sample IS NOT NULL GROUP BY s.sample`,
  )
  const instruments = db.prepare<[string], { instrument: string }>(
    `SELECT DISTINCT instrument FROM spectrum_now WHERE sample = ? ORDER BY instrument`,
  )

  const ids = db.prepare<[string, string], { id: number }>(
    `SELECT id FROM spectrum_now WHERE sample = ? AND instrument = ? ORDER BY measured_at, id`,
  )

  return {
    add: (arrival: number, instrument: string, raw: RawSpectrum, identity: Identity): number => {
      const { x, y, ...asRead } = raw
      const added = add.run(
        arrival,
        raw.index,
        instrument,
        identity.sample,
        identity.measuredAt,
        JSON.stringify(asRead),
        deflated(x),
        deflated(y),
        JSON.stringify(identity.flags),
      )
      return Number(added.lastInsertRowid)
    },

    /** Time of the sample's first spectrum; null when there is none. */
    firstMeasuredAt: (sample: string): number | null => first.get(sample)?.at ?? null,

    /** Every sample with the time its last spectrum arrived. */
    lastReceived: (): readonly { readonly sample: string; readonly receivedAt: number }[] =>
      lastReceived.all().map((row) => ({ sample: row.sample, receivedAt: row.received_at })),

    /** Instruments that have measured the sample. */
    instrumentsOf: (sample: string): readonly string[] => instruments.all(sample).map(({ instrument }) => instrument),

    /** All spectra of a sample on an instrument, excluded ones too, in order of measurement. */
    idsOf: (sample: string, instrument: string): readonly number[] => ids.all(sample, instrument).map(({ id }) => id),

    get: (id: number): StoredSpectrum | null => {
      const row = one.get(id)
      return row === undefined ? null : fromRow(row)
    },
  }
}
