import type { Db } from './open.ts'

/**
 * SQL condition on a spectrum `s`: not excluded by a person, not superseded by a longer version of its file. Whatever
 * averages, counts or compares spectra holds to it, so that statistics follow a decision at once.
 */
export const IN_STATISTICS = `
  coalesce((SELECT what FROM decision WHERE subject = 'spectrum ' || s.id AND what IN ('exclude', 'restore')
             ORDER BY id DESC LIMIT 1), 'restore') = 'restore'
  AND (SELECT outcome FROM arrival_outcome o WHERE o.arrival = s.arrival ORDER BY o.id DESC LIMIT 1) IS NOT 'superseded'`

export type ServiceSubject = 'instrument' | 'sample' | 'study'

/** A time in which the alarms of an instrument, sample or study are silent. Epoch milliseconds. */
export interface ServicePeriod {
  readonly id: number
  readonly of: ServiceSubject
  readonly subject: string
  readonly since: number
  readonly until: number
  readonly by: string
  readonly why: string
}

export interface StoredDecision {
  readonly id: number
  readonly at: number
  readonly by: string
  readonly what: string
  readonly subject: string
  readonly why: string
}

export interface Reassignment {
  readonly spectrum: number
  /** Name before; null where the file named no sample. */
  readonly was: string | null
  readonly sample: string
}

const PERIODS = `
  SELECT p.id, p.of, p.subject, p.since, p.until, d.by, d.why FROM out_of_service p JOIN decision d ON d.id = p.decision`
const NOT_RETURNED = `NOT EXISTS (SELECT 1 FROM return_to_service r WHERE r.period = p.id)`

/** What people decided, and what the daemon has yet to make of it. */
export const decisions = (db: Db) => {
  const lastWord = db.prepare<[string], { what: string }>(
    `SELECT what FROM decision WHERE subject = ? AND what IN ('exclude', 'restore') ORDER BY id DESC LIMIT 1`,
  )
  const reassign = db.prepare(
    `INSERT INTO reassignment (decision, spectrum, was, sample, analysed_before, judged_before)
     VALUES (@decision, @spectrum, @was, @sample,
             (SELECT coalesce(max(id), 0) FROM analysis), (SELECT coalesce(max(id), 0) FROM judgement))`,
  )
  const reassigned = db.prepare<[number], Reassignment>(
    `SELECT spectrum, was, sample FROM reassignment WHERE decision = ?`,
  )
  const approved = db.prepare<[number], { sample: string; instrument: string }>(
    `SELECT sample, instrument FROM reference_set WHERE decision = ?`,
  )
  const unfollowed = db.prepare<[], StoredDecision>(
    `SELECT id, at, by, what, subject, why FROM decision
      WHERE what IN ('exclude', 'restore', 'reassign', 'approve-reference')
        AND id > coalesce((SELECT max(decision) FROM decision_followed), 0) ORDER BY id`,
  )
  const newest = db.prepare<[], { id: number | null }>(`SELECT max(id) AS id FROM decision`)
  const follow = db.prepare(`INSERT INTO decision_followed (decision, at, note) VALUES (?, ?, ?)`)
  const takeOut = db.prepare(
    `INSERT INTO out_of_service (decision, of, subject, since, until) VALUES (@decision, @of, @subject, @since, @until)`,
  )
  const takeBack = db.prepare(`INSERT INTO return_to_service (decision, period, at) VALUES (?, ?, ?)`)
  const notOver = db.prepare<[number], ServicePeriod>(
    `${PERIODS} WHERE p.until > ? AND ${NOT_RETURNED} ORDER BY p.since, p.id`,
  )
  const lastEnd = db.prepare<{ of: string; subject: string; now: number }, { at: number | null }>(
    `SELECT max(min(p.until, coalesce(r.at, p.until))) AS at
       FROM out_of_service p LEFT JOIN return_to_service r ON r.period = p.id
      WHERE p.of = @of AND p.subject = @subject AND p.since < min(p.until, coalesce(r.at, p.until))
        AND min(p.until, coalesce(r.at, p.until)) <= @now`,
  )

  return {
    isExcluded: (spectrum: number): boolean => lastWord.get(`spectrum ${spectrum}`)?.what === 'exclude',

    /** The spectrum is the other sample's from now on; what was computed of it under the old name no longer counts. */
    reassign: (decision: number, row: Reassignment): void => {
      reassign.run({ decision, ...row })
    },
    reassignmentOf: (decision: number): Reassignment | null => reassigned.get(decision) ?? null,

    /** The references that a decision fixed. */
    approvedBy: (decision: number): readonly { readonly sample: string; readonly instrument: string }[] =>
      approved.all(decision),

    /** Decisions that change what is judged, of which the daemon has not drawn the consequences, oldest first. */
    unfollowed: (): readonly StoredDecision[] => unfollowed.all(),
    /** Number of the newest decision; 0 when nobody has decided anything. */
    newest: (): number => newest.get()?.id ?? 0,
    markFollowed: (decision: number, at: number, note: string | null = null): void => {
      follow.run(decision, at, note)
    },

    takeOutOfService: (
      decision: number,
      period: { of: ServiceSubject; subject: string; since: number; until: number },
    ): void => {
      takeOut.run({ decision, ...period })
    },
    returnToService: (decision: number, period: number, at: number): void => {
      takeBack.run(decision, period, at)
    },

    /** Periods that are in force or set ahead, by their beginning. */
    periodsNotOver: (now: number): readonly ServicePeriod[] => notOver.all(now),

    /** When the newest period of just this subject ended; null where none has. */
    lastServiceEnd: (of: ServiceSubject, subject: string, now: number): number | null =>
      lastEnd.get({ of, subject, now })?.at ?? null,
  }
}
