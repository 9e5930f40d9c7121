import type { Departure } from '../series/commonChange.ts'
import { IN_STATISTICS } from './decisions.ts'
import type { Db } from './open.ts'

/** How far a sample was from its reference when its spectrum was judged. */
export interface StoredDeparture {
  readonly sample: string
  readonly instrument: string
  readonly at: number
  readonly departures: Readonly<Record<string, Departure>>
}

interface Row {
  sample: string
  instrument: string
  at: number
  departures: string
}

/** What `common-change` looks at: the departures of samples that one instrument measured. */
export const departures = (db: Db) => {
  const add = db.prepare(`INSERT INTO departure (spectrum, sample, departures) VALUES (?, ?, ?)`)
  const newest = db.prepare<[string], { at: number }>(
    `SELECT s.measured_at AS at FROM spectrum s
      WHERE s.instrument = ? AND EXISTS (SELECT 1 FROM departure d WHERE d.spectrum = s.id)
      ORDER BY s.measured_at DESC LIMIT 1`,
  )
  // a spectrum may be judged anew: its last departures count, under the name that counts
  const between = db.prepare<{ instrument: string; from: number; until: number }, Row>(
    `SELECT s.sample, s.instrument, s.measured_at AS at, d.departures
       FROM spectrum_now s JOIN departure d ON d.id = (SELECT max(id) FROM departure WHERE spectrum = s.id AND sample = s.sample)
      WHERE s.instrument = @instrument AND s.measured_at >= @from AND s.measured_at <= @until AND ${IN_STATISTICS}
      ORDER BY s.measured_at, s.id`,
  )

  return {
    add: (spectrum: number, sample: string, of: Readonly<Record<string, Departure>>): void => {
      add.run(spectrum, sample, JSON.stringify(of))
    },

    /** Time of the newest spectrum on the instrument that was compared with a reference. */
    newestAt: (instrument: string): number | null => newest.get(instrument)?.at ?? null,

    /** The newest departures of each sample that the instrument measured in that time. */
    newestBetween: (instrument: string, from: number, until: number): readonly StoredDeparture[] => [
      ...new Map(
        between
          .all({ instrument, from, until })
          .map((row) => [
            row.sample,
            { ...row, departures: JSON.parse(row.departures) as StoredDeparture['departures'] },
          ]),
      ).values(),
    ],
  }
}
