import type { Db } from './open.ts'

export interface DailyLetter {
  /** Of the room's calendar, `2026-03-02`. */
  readonly day: string
  readonly letter: number
  /** What it covers, epoch ms. */
  readonly since: number
  readonly until: number
}

/** Samples of whose newest spectrum a rule said so; the times are not asked for. */
const newestJudged = (outcome: 'undecided' | 'gathering'): string =>
  `SELECT s.sample || ' on ' || s.instrument || ', ' || j.rule || ': ' || min(j.what) AS line
     FROM spectrum_now s JOIN judgement j ON j.spectrum = s.id AND j.id > s.judged_before AND j.outcome = '${outcome}'
      AND j.id = (SELECT max(id) FROM judgement WHERE spectrum = j.spectrum AND rule = j.rule)
    WHERE s.id IN (SELECT max(id) FROM spectrum_now WHERE sample IS NOT NULL GROUP BY sample, instrument)
      AND @since <= @until
    GROUP BY s.id ORDER BY s.sample`

/** Daily letters: one row a day, so that a restart writes none twice. */
export const dailyLetters = (db: Db) => {
  const add = db.prepare(`INSERT INTO daily_letter (day, letter, since, until) VALUES (@day, @letter, @since, @until)`)
  const newest = db.prepare<[], DailyLetter>(`SELECT * FROM daily_letter ORDER BY until DESC LIMIT 1`)
  const counts = db.prepare<
    { since: number; until: number },
    {
      spectra: number
      samples: number
      repeated: number
      pending: number
      sent: number
      waiting: number
      failed: number
    }
  >(
    `SELECT (SELECT count(*) FROM spectrum s JOIN arrival r ON r.id = s.arrival WHERE r.received_at >= @since AND r.received_at < @until) AS spectra,
            (SELECT count(DISTINCT s.sample) FROM spectrum s JOIN arrival r ON r.id = s.arrival
              WHERE r.received_at >= @since AND r.received_at < @until) AS samples,
            (SELECT count(*) FROM arrival_outcome WHERE outcome = 'repeated' AND at >= @since AND at < @until) AS repeated,
            (SELECT count(*) FROM arrival r WHERE NOT EXISTS (SELECT 1 FROM arrival_outcome o WHERE o.arrival = r.id)) AS pending,
            (SELECT count(*) FROM letter_recipient WHERE state = 'sent' AND sent_at >= @since AND sent_at < @until) AS sent,
            (SELECT count(*) FROM letter_recipient WHERE state = 'waiting') AS waiting,
            (SELECT count(*) FROM letter_recipient WHERE state = 'failed') AS failed`,
  )
  const lines = (sql: string) => {
    const statement = db.prepare<{ since: number; until: number }, { line: string }>(sql)
    return (of: { since: number; until: number }): readonly string[] => statement.all(of).map(({ line }) => line)
  }
  const iso = (column: string): string => `strftime('%Y-%m-%dT%H:%M:%SZ', ${column} / 1000, 'unixepoch')`
  const named = `'alarm ' || id || ', ' || of || ' ' || subject || ': ' || message`
  const reports = {
    instruments: lines(
      `SELECT instrument || ': ' || count(*) || CASE count(*) WHEN 1 THEN ' file' ELSE ' files' END || ', the last at ' || ${iso('max(received_at)')} AS line
         FROM arrival WHERE received_at >= @since AND received_at < @until GROUP BY instrument ORDER BY instrument`,
    ),
    setAside: lines(
      `SELECT r.instrument || ' ' || r.file || ': ' || coalesce(o.reason, '') AS line
         FROM arrival_outcome o JOIN arrival r ON r.id = o.arrival
        WHERE o.at >= @since AND o.at < @until AND (o.outcome = 'rejected' OR (o.outcome = 'stored' AND o.reason IS NOT NULL))
        ORDER BY o.id`,
    ),
    // told once: a sample is new on the day of its first spectrum
    unknownSamples: lines(
      `SELECT coalesce(s.sample, '(no name)') || ' on ' || min(s.instrument) AS line
         FROM spectrum_now s JOIN arrival r ON r.id = s.arrival
        WHERE NOT EXISTS (SELECT 1 FROM analysis a WHERE a.spectrum = s.id AND a.id > s.analysed_before)
        GROUP BY s.sample HAVING min(r.received_at) >= @since AND min(r.received_at) < @until ORDER BY 1`,
    ),
    alarms: lines(
      `SELECT priority || ', ' || state || ' since ' || coalesce(${iso('raised_at')}, '?') || ': ' || ${named} AS line
         FROM alarm WHERE state NOT IN ('normal', 'shelved', 'suppressed-by-design', 'out-of-service')
        ORDER BY CASE priority WHEN 'high' THEN 0 WHEN 'medium' THEN 1 ELSE 2 END, id`,
    ),
    stale: lines(
      `SELECT ${named} AS line FROM alarm
        WHERE state = 'unacknowledged' AND raised_at < @until - 86400000 ORDER BY raised_at`,
    ),
    chattering: lines(
      `SELECT ${named} || ' (' || n || ' times)' AS line
         FROM (SELECT alarm, count(*) AS n FROM alarm_event WHERE event = 'raised' AND at >= @since AND at < @until GROUP BY alarm)
         JOIN alarm ON id = alarm WHERE n >= 3 ORDER BY n DESC, id`,
    ),
    silent: lines(
      `SELECT state || coalesce(' until ' || ${iso('shelved_until')}, '') || ': ' || ${named} AS line
         FROM alarm WHERE state IN ('shelved', 'suppressed-by-design', 'out-of-service') AND (active OR latched OR shelved_until IS NOT NULL)
        ORDER BY state, id`,
    ),
    undecided: lines(newestJudged('undecided')),
    gathering: lines(newestJudged('gathering')),
    decisions: lines(
      `SELECT ${iso('at')} || ' ' || by || ': ' || what || ' ' || subject || CASE why WHEN '' THEN '' ELSE ': ' || why END AS line
         FROM decision WHERE at >= @since AND at < @until ORDER BY id`,
    ),
  }
  const firstRun = db.prepare<[], { at: number | null }>(`SELECT min(since) AS at FROM configuration_period`)

  return {
    add: (row: DailyLetter): void => {
      add.run(row)
    },
    newest: (): DailyLetter | null => newest.get() ?? null,
    /** What happened between two times, and what stands now, in lines as the daily letter prints them. */
    report: (since: number, until: number) => {
      const of = { since, until }
      const { sent, waiting, failed, ...taken } = counts.get(of)!
      return {
        ...taken,
        letters: { sent, waiting, failed },
        instruments: reports.instruments(of),
        setAside: reports.setAside(of),
        unknownSamples: reports.unknownSamples(of),
        alarms: reports.alarms(of),
        stale: reports.stale(of),
        chattering: reports.chattering(of),
        silent: reports.silent(of),
        undecided: reports.undecided(of),
        gathering: reports.gathering(of),
        decisions: reports.decisions(of),
      }
    },
    /** When a configuration first came into force here; null in an empty database. */
    firstRunAt: (): number | null => firstRun.get()?.at ?? null,
  }
}
