import { analysisJson } from '../analysis/json.ts'
import type { Measured } from '../analysis/quantities.ts'
import type { Analysis } from '../analysis/types.ts'
import type { Db } from './open.ts'

export interface NewAnalysis {
  readonly spectrum: number
  readonly at: number
  readonly configSha256: string
  readonly study: string
  readonly species: string
  /** Null where no recipe could be chosen. */
  readonly recipe: string | null
  readonly analysis: Analysis
  readonly quantities: Readonly<Record<string, Measured>>
  readonly temperatureC: number | null
  readonly pathMm: number
  readonly verdict: 'pass' | 'look' | 'fail' | null
}

/** One spectrum of a window: what the series room makes occasions of. */
export interface WindowRow {
  readonly spectrum: number
  readonly measuredAt: number
  readonly receivedAt: number
  readonly quantities: Readonly<Record<string, Measured>>
}

interface WindowSqlRow {
  spectrum: number
  measured_at: number
  received_at: number
  quantities: string
}

const COLUMNS = [
  'spectrum, at, engine, config_sha256, study, species, recipe',
  'delta_cm1, u_delta_cm1, b_cm1, u_b_cm1, c_cm1, u_c_cm1, beta',
  'nu1_cm1, u_nu1_cm1, nu2_cm1, u_nu2_cm1, nu3_cm1, u_nu3_cm1',
  'max1_nm, max2_nm, max3_nm, width1_cm1, width2_cm1, height1, height2',
  'scatter, temperature, path, rms, noise, reduced_chi2, verdict, flags, quantities, body',
]
  .join(', ')
  .split(', ')

/** Not excluded by a person, not superseded by a longer version of its file. */
const IN_STATISTICS = `
  coalesce((SELECT what FROM decision WHERE subject = 'spectrum ' || s.id AND what IN ('exclude', 'restore')
             ORDER BY id DESC LIMIT 1), 'restore') = 'restore'
  AND (SELECT outcome FROM arrival_outcome o WHERE o.arrival = s.arrival ORDER BY o.id DESC LIMIT 1) IS NOT 'superseded'`

const WINDOW = `
  SELECT s.id AS spectrum, s.measured_at, r.received_at, a.quantities
  FROM spectrum s JOIN arrival r ON r.id = s.arrival
  JOIN analysis a ON a.id = (SELECT max(id) FROM analysis WHERE spectrum = s.id)`

const windowRow = (row: WindowSqlRow): WindowRow => ({
  spectrum: row.spectrum,
  measuredAt: row.measured_at,
  receivedAt: row.received_at,
  quantities: JSON.parse(row.quantities) as WindowRow['quantities'],
})

/** Analyses of spectra; earlier ones stay, the newest of each spectrum counts. */
export const analyses = (db: Db) => {
  const add = db.prepare(
    `INSERT INTO analysis (${COLUMNS.join(', ')}) VALUES (${COLUMNS.map((c) => `@${c}`).join(', ')})`,
  )
  const window = db.prepare<
    { sample: string; instrument: string; recipe: string | null; engine: string; until: number; limit: number },
    WindowSqlRow
  >(`${WINDOW}
     WHERE s.sample = @sample AND s.instrument = @instrument AND s.measured_at <= @until
       AND a.recipe IS @recipe AND a.engine = @engine AND ${IN_STATISTICS}
     ORDER BY s.measured_at DESC, s.id DESC LIMIT @limit`)
  const onInstrument = db.prepare<
    { instrument: string; engine: string; until: number; limit: number },
    WindowSqlRow
  >(`${WINDOW}
     WHERE s.instrument = @instrument AND s.measured_at <= @until AND a.engine = @engine AND ${IN_STATISTICS}
     ORDER BY s.measured_at DESC, s.id DESC LIMIT @limit`)
  const some = db.prepare<[string], WindowSqlRow>(
    `${WINDOW} WHERE s.id IN (SELECT value FROM json_each(?)) AND ${IN_STATISTICS} ORDER BY s.measured_at, s.id`,
  )

  return {
    add: (row: NewAnalysis): void => {
      const q = (name: string) => row.quantities[name] ?? [null, null]
      const nm = (role: string) =>
        row.analysis.bands.find((band) => band.role === role || band.role === `${role}a`)?.maximumNm ?? null
      add.run({
        spectrum: row.spectrum,
        at: row.at,
        engine: row.analysis.engine,
        config_sha256: row.configSha256,
        study: row.study,
        species: row.species,
        recipe: row.recipe,
        delta_cm1: q('delta_o')[0],
        u_delta_cm1: q('delta_o')[1],
        b_cm1: q('b')[0],
        u_b_cm1: q('b')[1],
        c_cm1: q('c')[0],
        u_c_cm1: q('c')[1],
        beta: q('beta')[0],
        nu1_cm1: q('nu1')[0],
        u_nu1_cm1: q('nu1')[1],
        nu2_cm1: q('nu2')[0],
        u_nu2_cm1: q('nu2')[1],
        nu3_cm1: q('nu3')[0],
        u_nu3_cm1: q('nu3')[1],
        max1_nm: nm('nu1'),
        max2_nm: nm('nu2'),
        max3_nm: nm('nu3'),
        width1_cm1: q('width1')[0],
        width2_cm1: q('width2')[0],
        height1: q('height1')[0],
        height2: q('height2')[0],
        scatter: q('scatter')[0],
        temperature: row.temperatureC,
        path: row.pathMm,
        rms: q('rms')[0],
        noise: q('noise')[0],
        reduced_chi2: q('reduced_chi2')[0],
        verdict: row.verdict,
        flags: JSON.stringify(row.analysis.flags),
        quantities: JSON.stringify(row.quantities),
        body: JSON.stringify(analysisJson(row.analysis)),
      })
    },

    /** Newest `limit` spectra of a sample on an instrument up to a time, of one recipe and engine, oldest first. */
    window: (
      of: { sample: string; instrument: string; recipe: string | null; engine: string },
      until: number,
      limit: number,
    ): readonly WindowRow[] =>
      window
        .all({ ...of, until, limit })
        .map(windowRow)
        .reverse(),

    /** Newest `limit` spectra of an instrument up to a time, whatever the sample, oldest first. */
    windowOfInstrument: (
      of: { instrument: string; engine: string },
      until: number,
      limit: number,
    ): readonly WindowRow[] =>
      onInstrument
        .all({ ...of, until, limit })
        .map(windowRow)
        .reverse(),

    /** These spectra, oldest first, excluded and superseded ones left out. */
    some: (ids: readonly number[]): readonly WindowRow[] => some.all(JSON.stringify(ids)).map(windowRow),
  }
}
