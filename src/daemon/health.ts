import { ENGINE } from '../analysis/types.ts'
import { decisions } from '../store/decisions.ts'
import { type Db, whoHolds } from '../store/index.ts'
import type { DailyNote } from './daily.ts'

/** What the daemon notes of itself, for `status` and the health page to read from another process. */
export interface DaemonNote {
  readonly instruments: readonly {
    readonly instrument: string
    readonly reachable: boolean
    /** Why not, where it is not. */
    readonly why: string | null
    readonly last_scan_at: string | null
    readonly waiting: readonly string[]
  }[]
  /** Sentences: a refused reload, a storage fault, a watcher that failed. */
  readonly troubles: readonly string[]
}

export interface Health extends DaemonNote {
  /** Empty when healthy. */
  readonly reasons: readonly string[]
  /** Who holds the data folder; null when no daemon runs. */
  readonly daemon: string | null
  readonly spectra: number
  readonly last_stored_at: string | null
  readonly pending: number
  /** Files of the last day that held bytes seen before: harmless copies, or an instrument that exports one spectrum again and again. */
  readonly repeated: number
  readonly letters: {
    readonly waiting: number
    readonly failed: number
    /** Of those that wait: held by quiet hours or for a digest. */
    readonly held: number
    readonly oldest_waiting: string | null
    readonly last_error: string | null
  }
  /** The daily letter: null while it is turned off. */
  readonly daily: { readonly last_sent_at: string | null; readonly last_day: string | null } | null
  readonly alarms: number
  readonly set_aside: readonly {
    readonly instrument: string
    readonly file: string
    readonly received_at: string
    readonly reason: string | null
  }[]
  /** Alarms that a person has silenced for a time. */
  readonly shelved: readonly string[]
  /** Instruments, samples and studies whose alarms are silent now, or will be, with the end, who and why. */
  readonly out_of_service: readonly string[]
  readonly gathering: readonly string[]
  readonly unknown_samples: readonly string[]
}

/** How long a daemon may be silent, and how long a fresh fault counts, before `status` calls it degraded. */
const SILENT_MS = 5 * 60_000
const RECENT_MS = 24 * 3_600_000
const LISTED = 20

/** Progress, not liveness: reads what was stored and what the daemon last noted of itself. Reads only. */
export const healthOf = (db: Db, dataFolder: string, now: number): Health => {
  const daemon = whoHolds(dataFolder)
  const note = noteOf(db)
  const recent = new Date(now - RECENT_MS).toISOString().slice(0, 19)
  const counts = db
    .prepare<[string], { spectra: number; pending: number; repeated: number; alarms: number; last: string | null }>(
      `SELECT (SELECT count(*) FROM spectrum) AS spectra,
              (SELECT count(*) FROM intake WHERE outcome IS NULL) AS pending,
              (SELECT count(*) FROM intake WHERE outcome = 'repeated' AND received_at >= ?) AS repeated,
              (SELECT count(*) FROM alarm WHERE state <> 'normal' AND (active OR latched OR state NOT IN
                 ('shelved', 'suppressed-by-design', 'out-of-service'))) AS alarms,
              (SELECT max(received_at) FROM intake WHERE outcome = 'stored') AS last`,
    )
    .get(recent)!
  const letters = db
    .prepare<[], Health['letters']>(
      `SELECT count(*) FILTER (WHERE t.state = 'waiting') AS waiting, count(*) FILTER (WHERE t.state = 'failed') AS failed,
              count(*) FILTER (WHERE t.state = 'waiting' AND t.held IS NOT NULL) AS held,
              strftime('%Y-%m-%dT%H:%M:%SZ', min(l.created_at) FILTER (WHERE t.state = 'waiting') / 1000, 'unixepoch') AS oldest_waiting,
              (SELECT last_error FROM letter_recipient WHERE last_error IS NOT NULL AND state IN ('waiting', 'failed')
                ORDER BY id DESC LIMIT 1) AS last_error
         FROM letter_recipient t JOIN letter l ON l.id = t.letter`,
    )
    .get()!
  const setAside = db
    .prepare<[number], Health['set_aside'][number]>(
      `SELECT instrument, file, received_at, reason FROM intake
        WHERE outcome = 'rejected' OR (outcome = 'stored' AND reason IS NOT NULL) ORDER BY arrival DESC LIMIT ?`,
    )
    .all(LISTED)
  const daily = dailyOf(db)
  return {
    ...note.body,
    reasons: [
      ...aliveness(daemon, note.at, now),
      ...note.body.troubles,
      ...note.body.instruments
        .filter(({ reachable }) => !reachable)
        .map(
          ({ instrument, why }) => `the drop folder of ${instrument} cannot be reached: ${why ?? 'it does not answer'}`,
        ),
      ...setAside
        .filter(({ received_at }) => received_at >= recent)
        .map(({ instrument, file }) => `a file was set aside: ${instrument} ${file}`),
      ...(letters.waiting > 0 && letters.last_error !== null
        ? [
            `${count(letters.waiting, 'letter waits', 'letters wait')} since ${letters.oldest_waiting}: ${letters.last_error}`,
          ]
        : []),
      ...(letters.failed > 0
        ? [`${count(letters.failed, 'letter was', 'letters were')} given up: ${letters.last_error}`]
        : []),
      ...outdated(db),
      ...dailyReasons(daily, now),
    ],
    daily:
      daily === null
        ? null
        : { last_day: daily.day, last_sent_at: daily.sentAt === null ? null : new Date(daily.sentAt).toISOString() },
    daemon,
    spectra: counts.spectra,
    last_stored_at: counts.last,
    pending: counts.pending,
    repeated: counts.repeated,
    letters,
    alarms: counts.alarms,
    set_aside: setAside,
    shelved: shelved(db),
    out_of_service: outOfService(db, now),
    gathering: gathering(db),
    unknown_samples: unknownSamples(db),
  }
}

/** Samples whose oldest spectrum was last analysed by another engine: windows and references leave such spectra out. */
const outdated = (db: Db): readonly string[] => {
  const { samples } = db
    .prepare<[string], { samples: number }>(
      `SELECT count(*) AS samples
         FROM (SELECT min(id) AS id FROM spectrum_now WHERE sample IS NOT NULL GROUP BY sample, instrument) oldest
         JOIN analysis a ON a.id = (SELECT max(id) FROM analysis WHERE spectrum = oldest.id)
        WHERE a.engine <> ?`,
    )
    .get(ENGINE)!
  return samples === 0
    ? []
    : [
        `${count(samples, 'sample has', 'samples have')} spectra that an earlier engine analysed, which no rule compares with newer ones: tendq reanalyse --all --keep-recipe`,
      ]
}

interface Daily {
  /** Since when one is expected every day. */
  readonly since: number
  readonly day: string | null
  readonly sentAt: number | null
}

/** A day of 25 hours, and an hour of patience with the mail server. */
const DAILY_MS = 26 * 3_600_000

const dailyOf = (db: Db): Daily | null => {
  const said = db.prepare<[], { body: string }>(`SELECT body FROM daemon_state WHERE subject = 'daily'`).get()
  const since = said === undefined ? null : (JSON.parse(said.body) as DailyNote).since
  if (since === null) return null
  const last = db
    .prepare<[], { day: string | null; sent_at: number | null }>(
      `SELECT max(d.day) AS day, max(t.sent_at) AS sent_at FROM daily_letter d LEFT JOIN letter_recipient t ON t.letter = d.letter`,
    )
    .get()
  return { since, day: last?.day ?? null, sentAt: last?.sent_at ?? null }
}

const dailyReasons = (daily: Daily | null, now: number): readonly string[] =>
  daily === null || now - Math.max(daily.since, daily.sentAt ?? 0) <= DAILY_MS
    ? []
    : [
        daily.sentAt === null
          ? 'no daily letter has gone out since it is expected: see the letters that wait, and the mail settings'
          : `no daily letter has gone out since ${new Date(daily.sentAt).toISOString()}`,
      ]

const count = (n: number, one: string, many: string): string => `${n} ${n === 1 ? one : many}`

const noteOf = (db: Db): { body: DaemonNote; at: number | null } => {
  const row = db
    .prepare<[], { body: string; at: number }>(`SELECT body, at FROM daemon_state WHERE subject = 'daemon'`)
    .get()
  return row === undefined
    ? { body: { instruments: [], troubles: [] }, at: null }
    : { body: JSON.parse(row.body) as DaemonNote, at: row.at }
}

const aliveness = (daemon: string | null, notedAt: number | null, now: number): readonly string[] => {
  if (daemon === null) return ['no daemon is running on this data folder: start `tendq run`']
  if (notedAt === null || now - notedAt > SILENT_MS)
    return ['the daemon runs but has noted nothing for five minutes: see its log']
  return []
}

/** Samples whose newest spectrum was judged by a rule that still gathers. */
const gathering = (db: Db): readonly string[] =>
  db
    .prepare<[number], { line: string }>(
      `SELECT s.sample || ' on ' || s.instrument || ': ' || min(j.what) AS line
         FROM spectrum_now s JOIN judgement j ON j.spectrum = s.id AND j.id > s.judged_before AND j.outcome = 'gathering'
          AND j.id = (SELECT max(id) FROM judgement WHERE spectrum = j.spectrum AND rule = j.rule)
        WHERE s.id IN (SELECT max(id) FROM spectrum_now WHERE sample IS NOT NULL GROUP BY sample, instrument)
        GROUP BY s.id ORDER BY s.sample LIMIT ?`,
    )
    .all(LISTED)
    .map(({ line }) => line)

const shelved = (db: Db): readonly string[] =>
  db
    .prepare<[number], { line: string }>(
      `SELECT 'alarm ' || id || ' of ' || subject || ' (' || rule || ') until '
              || strftime('%Y-%m-%dT%H:%M:%SZ', shelved_until / 1000, 'unixepoch') AS line
         FROM alarm WHERE state = 'shelved' ORDER BY shelved_until LIMIT ?`,
    )
    .all(LISTED)
    .map(({ line }) => line)

const outOfService = (db: Db, now: number): readonly string[] => {
  const iso = (ms: number): string => `${new Date(ms).toISOString().slice(0, 19)}Z`
  return decisions(db)
    .periodsNotOver(now)
    .slice(0, LISTED)
    .map(
      ({ of, subject, since, until, by, why }) =>
        `${of} ${subject} ${since > now ? `from ${iso(since)} ` : ''}until ${iso(until)}, by ${by}: ${why}`,
    )
}

const unknownSamples = (db: Db): readonly string[] =>
  db
    .prepare<[number], { sample: string }>(
      `SELECT coalesce(sample, '(no name)') AS sample FROM spectrum_now s
        WHERE NOT EXISTS (SELECT 1 FROM analysis a WHERE a.spectrum = s.id AND a.id > s.analysed_before) GROUP BY 1 ORDER BY 1 LIMIT ?`,
    )
    .all(LISTED)
    .map(({ sample }) => sample)
