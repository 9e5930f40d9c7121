import { analysisJson } from '../analysis/json.ts'
import type { Measured } from '../analysis/quantities.ts'
import type { Analysis } from '../analysis/types.ts'
import { IN_STATISTICS } from './decisions.ts'
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

/** Columns that hold the value, or the uncertainty, of a name of the rule language. */
const VALUES: Readonly<Record<string, string>> = {
  delta_cm1: 'delta_o',
  b_cm1: 'b',
  c_cm1: 'c',
  beta: 'beta',
  nu1_cm1: 'nu1',
  nu2_cm1: 'nu2',
  nu3_cm1: 'nu3',
  width1_cm1: 'width1',
  width2_cm1: 'width2',
  height1: 'height1',
  height2: 'height2',
  scatter: 'scatter',
  extent: 'extent',
  rms: 'rms',
  noise: 'noise',
  reduced_chi2: 'reduced_chi2',
}
const UNCERTAINTIES: Readonly<Record<string, string>> = {
  u_delta_cm1: 'delta_o',
  u_b_cm1: 'b',
  u_c_cm1: 'c',
  u_nu1_cm1: 'nu1',
  u_nu2_cm1: 'nu2',
  u_nu3_cm1: 'nu3',
  u_extent: 'extent',
}
/** Columns that hold the wavelength of a band's maximum. */
const MAXIMA: Readonly<Record<string, string>> = { max1_nm: 'nu1', max2_nm: 'nu2', max3_nm: 'nu3' }

const COLUMNS = [
  ...['spectrum', 'at', 'engine', 'config_sha256', 'study', 'species', 'recipe', 'temperature', 'path', 'verdict'],
  ...['flags', 'quantities', 'body'],
  ...[VALUES, UNCERTAINTIES, MAXIMA].flatMap(Object.keys),
]

const WINDOW = `
  SELECT s.id AS spectrum, s.measured_at, r.received_at, a.quantities
  FROM spectrum_now s JOIN arrival r ON r.id = s.arrival
  JOIN analysis a ON a.id = (SELECT max(id) FROM analysis WHERE spectrum = s.id AND id > s.analysed_before)`

const windowRow = (row: WindowSqlRow): WindowRow => ({
  spectrum: row.spectrum,
  measuredAt: row.measured_at,
  receivedAt: row.received_at,
  quantities: JSON.parse(row.quantities) as WindowRow['quantities'],
})

/** Of a split band the stronger half counts, as for the quantities of the rule language. */
const maximumOf = ({ bands }: Analysis, role: string): number | null => {
  const halves = bands.filter((band) => [role, `${role}a`, `${role}b`].includes(band.role ?? ''))
  return halves.toSorted((a, b) => b.height - a.height)[0]?.maximumNm ?? null
}

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
  const earliest = db.prepare<
    { sample: string; instrument: string; recipe: string | null; engine: string; limit: number },
    WindowSqlRow
  >(`${WINDOW}
     WHERE s.sample = @sample AND s.instrument = @instrument
       AND a.recipe IS @recipe AND a.engine = @engine AND ${IN_STATISTICS}
     ORDER BY s.measured_at, s.id LIMIT @limit`)
  const onInstrument = db.prepare<
    { instrument: string; engine: string; until: number; limit: number },
    WindowSqlRow
  >(`${WINDOW}
     WHERE s.instrument = @instrument AND s.measured_at <= @until AND a.engine = @engine AND ${IN_STATISTICS}
     ORDER BY s.measured_at DESC, s.id DESC LIMIT @limit`)
  const some = db.prepare<{ ids: string; sample: string }, WindowSqlRow>(
    `${WINDOW} WHERE s.id IN (SELECT value FROM json_each(@ids)) AND s.sample = @sample AND ${IN_STATISTICS}
     ORDER BY s.measured_at, s.id`,
  )

  return {
    add: (row: NewAnalysis): void => {
      const { analysis, quantities } = row
      const columns = (names: Readonly<Record<string, string>>, of: (name: string) => number | null) =>
        Object.fromEntries(Object.entries(names).map(([column, name]) => [column, of(name)]))
      add.run({
        spectrum: row.spectrum,
        at: row.at,
        engine: analysis.engine,
        config_sha256: row.configSha256,
        study: row.study,
        species: row.species,
        recipe: row.recipe,
        temperature: row.temperatureC,
        path: row.pathMm,
        verdict: row.verdict,
        flags: JSON.stringify(analysis.flags),
        quantities: JSON.stringify(quantities),
        body: JSON.stringify(analysisJson(analysis)),
        ...columns(VALUES, (name) => quantities[name]?.[0] ?? null),
        ...columns(UNCERTAINTIES, (name) => quantities[name]?.[1] ?? null),
        ...columns(MAXIMA, (role) => maximumOf(analysis, role)),
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

    /** The same, but the sample's first `limit` spectra. */
    earliest: (
      of: { sample: string; instrument: string; recipe: string | null; engine: string },
      limit: number,
    ): readonly WindowRow[] => earliest.all({ ...of, limit }).map(windowRow),

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

    /** Those of these spectra that are still the sample's, oldest first; excluded and superseded ones left out. */
    some: (ids: readonly number[], sample: string): readonly WindowRow[] =>
      some.all({ ids: JSON.stringify(ids), sample }).map(windowRow),
  }
}
