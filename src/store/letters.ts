import type { AlarmFacts, LetterFacts } from '../mail/types.ts'
import type { Db } from './open.ts'

export interface WaitingLetter {
  /** Row of the recipient. */
  readonly id: number
  readonly letter: number
  readonly recipient: string
  readonly messageId: string
  readonly inReplyTo: string | null
  readonly attempts: number
  readonly firstAttemptAt: number | null
  readonly createdAt: number
  readonly facts: LetterFacts
}

interface WaitingRow {
  id: number
  letter: number
  recipient: string
  message_id: string
  in_reply_to: string | null
  attempts: number
  first_attempt_at: number | null
  created_at: number
  facts: string
}

/** SQL condition: the letter goes, or went, to somebody, by itself or in another one. */
const TOLD = `EXISTS (SELECT 1 FROM letter_recipient t
  WHERE t.letter = letter.id AND (t.state <> 'withdrawn' OR t.told_in IS NOT NULL))`

/** Letters are rows before they are messages: committed with the alarm they tell of. */
export const letters = (db: Db) => {
  const add = db.prepare(`INSERT INTO letter (alarm, facts, subject, created_at) VALUES (?, ?, ?, ?)`)
  const addRecipient = db.prepare(
    `INSERT INTO letter_recipient (letter, recipient, message_id, in_reply_to, state, attempts, next_attempt_at)
     VALUES (?, ?, ?, ?, 'waiting', 0, ?)`,
  )
  const earlier = db.prepare<[number, string], { message_id: string }>(
    `SELECT t.message_id FROM letter_recipient t JOIN letter l ON l.id = t.letter
      WHERE l.alarm = ? AND t.recipient = ? AND t.state <> 'withdrawn' ORDER BY t.id LIMIT 1`,
  )
  const due = db.prepare<[number, number], WaitingRow>(
    `SELECT t.id, t.letter, t.recipient, t.message_id, t.in_reply_to, t.attempts, t.first_attempt_at, l.created_at, l.facts
       FROM letter_recipient t JOIN letter l ON l.id = t.letter
      WHERE t.state = 'waiting' AND t.next_attempt_at <= ? ORDER BY t.next_attempt_at, t.id LIMIT ?`,
  )
  const sent = db.prepare(
    `UPDATE letter_recipient SET state = 'sent', attempts = attempts + 1, sent_at = ?, next_attempt_at = NULL, held = NULL,
            first_attempt_at = coalesce(first_attempt_at, ?), last_error = NULL WHERE id = ?`,
  )
  const later = db.prepare(
    `UPDATE letter_recipient SET attempts = attempts + 1, next_attempt_at = ?, last_error = ?,
            first_attempt_at = coalesce(first_attempt_at, ?) WHERE id = ?`,
  )
  const failed = db.prepare(
    `UPDATE letter_recipient SET state = 'failed', attempts = attempts + 1, next_attempt_at = NULL, last_error = ?,
            first_attempt_at = coalesce(first_attempt_at, ?) WHERE id = ?`,
  )
  const lastFacts = db.prepare<[number], { facts: string }>(
    `SELECT facts FROM letter WHERE alarm = ? ORDER BY id DESC LIMIT 1`,
  )
  const last = db.prepare<[number], { facts: string; told: number; created_at: number }>(
    `SELECT facts, created_at, ${TOLD} AS told
       FROM letter WHERE alarm = ? ORDER BY id DESC LIMIT 1`,
  )
  const lastTold = db.prepare<[number], { facts: string }>(
    `SELECT facts FROM letter WHERE alarm = ? AND ${TOLD}
      ORDER BY id DESC LIMIT 1`,
  )
  const waitingOfAlarm = db.prepare<[number], { id: number; recipient: string; facts: string }>(
    `SELECT t.id, t.recipient, l.facts FROM letter_recipient t JOIN letter l ON l.id = t.letter
      WHERE l.alarm = ? AND t.state = 'waiting'`,
  )
  const withdraw = db.prepare(
    `UPDATE letter_recipient SET state = 'withdrawn', next_attempt_at = NULL, held = ?, told_in = ? WHERE id = ? AND state = 'waiting'`,
  )
  const sentOfAlarm = db.prepare<[number, number], { recipient: string }>(
    `SELECT DISTINCT t.recipient FROM letter_recipient t JOIN letter l ON l.id = t.letter
      WHERE l.alarm = ? AND l.created_at >= ? AND (t.state = 'sent' OR t.told_in IS NOT NULL)`,
  )
  const toldSince = db.prepare<[number], { n: number | null }>(
    `SELECT sum(1 + coalesce(json_array_length(facts, '$.alsoAlarms'), 0)) AS n FROM letter
      WHERE created_at > ? AND alarm IS NOT NULL AND facts ->> '$.event' = 'raised' AND ${TOLD}`,
  )
  const waitingAlarms = db.prepare<
    [],
    { id: number; recipient: string; alarm: number; subject: string; facts: string }
  >(
    `SELECT t.id, t.recipient, l.alarm, l.subject, l.facts FROM letter_recipient t JOIN letter l ON l.id = t.letter
      WHERE t.state = 'waiting' AND l.alarm IS NOT NULL ORDER BY t.id`,
  )
  const stateOf = db.prepare<[number], { state: string }>(`SELECT state FROM letter_recipient WHERE id = ?`)
  const hold = db.prepare(
    `UPDATE letter_recipient SET next_attempt_at = ?, held = ? WHERE id = ? AND state = 'waiting'`,
  )
  const nextDue = db.prepare<[], { at: number | null }>(
    `SELECT min(next_attempt_at) AS at FROM letter_recipient WHERE state = 'waiting'`,
  )
  const standing = db.prepare<
    [],
    { waiting: number; failed: number; oldest: number | null; last_error: string | null }
  >(
    `SELECT count(*) FILTER (WHERE t.state = 'waiting') AS waiting, count(*) FILTER (WHERE t.state = 'failed') AS failed,
            min(l.created_at) FILTER (WHERE t.state = 'waiting') AS oldest,
            max(t.last_error) FILTER (WHERE t.state = 'waiting') AS last_error
       FROM letter_recipient t JOIN letter l ON l.id = t.letter`,
  )

  return {
    /** Adds a letter to each recipient, in the thread of the alarm's first letter to them. */
    add: (
      { alarm, facts, subject }: { alarm: number | null; facts: LetterFacts; subject: string },
      recipients: readonly string[],
      at: number,
      messageIdFor: (letter: number, recipient: string) => string,
    ): number => {
      const letter = Number(add.run(alarm, JSON.stringify(facts), subject, at).lastInsertRowid)
      for (const recipient of new Set(recipients)) {
        const thread = alarm === null ? null : (earlier.get(alarm, recipient)?.message_id ?? null)
        addRecipient.run(letter, recipient, messageIdFor(letter, recipient), thread, at)
      }
      return letter
    },

    due: (now: number, limit: number): readonly WaitingLetter[] =>
      due.all(now, limit).map((row) => ({
        id: row.id,
        letter: row.letter,
        recipient: row.recipient,
        messageId: row.message_id,
        inReplyTo: row.in_reply_to,
        attempts: row.attempts,
        firstAttemptAt: row.first_attempt_at,
        createdAt: row.created_at,
        facts: JSON.parse(row.facts) as LetterFacts,
      })),

    /** Whether it still waits: a person or the daemon may have withdrawn it since it was found due. */
    isWaiting: (id: number): boolean => stateOf.get(id)?.state === 'waiting',

    /** Waits until then for a reason that is nobody's fault; no attempt is counted. */
    hold: (id: number, until: number, why: string): void => {
      hold.run(until, why, id)
    },

    /** Takes back a letter that still waits, because `why`; `toldIn`: the letter that tells it instead. */
    withdraw: (id: number, why: string, toldIn: number | null = null): void => {
      withdraw.run(why, toldIn, id)
    },

    /** Letters about an alarm that still wait. */
    waitingOf: (
      alarm: number,
    ): readonly { readonly id: number; readonly recipient: string; readonly facts: LetterFacts }[] =>
      waitingOfAlarm.all(alarm).map((row) => ({ ...row, facts: JSON.parse(row.facts) as LetterFacts })),

    /** How many alarms letters have told of, or will, that rang since a time. */
    raisedSince: (since: number): number => toldSince.get(since)?.n ?? 0,

    /** Every letter about an alarm that waits, oldest first. */
    waitingAlarms: (): readonly {
      readonly id: number
      readonly recipient: string
      readonly alarm: number
      readonly subject: string
      readonly facts: AlarmFacts
    }[] => waitingAlarms.all().map((row) => ({ ...row, facts: JSON.parse(row.facts) as AlarmFacts })),

    /** Who has had a letter about an alarm that was written since a time. */
    sentTo: (alarm: number, since: number): readonly string[] =>
      sentOfAlarm.all(alarm, since).map(({ recipient }) => recipient),

    markSent: (id: number, at: number): void => {
      sent.run(at, at, id)
    },
    markLater: (id: number, at: number, nextAt: number, why: string): void => {
      later.run(nextAt, why, at, id)
    },
    markFailed: (id: number, at: number, why: string): void => {
      failed.run(why, at, id)
    },

    /** Facts of the newest letter about an alarm; null when none was written. */
    lastFacts: (alarm: number): LetterFacts | null => {
      const row = lastFacts.get(alarm)
      return row === undefined ? null : (JSON.parse(row.facts) as LetterFacts)
    },

    /** The newest letter about an alarm, and whether it went to anybody: what is silent keeps its facts without. */
    last: (alarm: number): { readonly facts: AlarmFacts; readonly told: boolean; readonly at: number } | null => {
      const row = last.get(alarm)
      const facts = row === undefined ? null : (JSON.parse(row.facts) as LetterFacts)
      return facts?.kind === 'alarm' ? { facts, told: row!.told === 1, at: row!.created_at } : null
    },

    /** What people last heard of an alarm; null when they have heard nothing. */
    lastTold: (alarm: number): AlarmFacts | null => {
      const row = lastTold.get(alarm)
      const facts = row === undefined ? null : (JSON.parse(row.facts) as LetterFacts)
      return facts?.kind === 'alarm' ? facts : null
    },

    /** When the next letter is due; null when none waits. */
    nextDueAt: (): number | null => nextDue.get()?.at ?? null,
    standing: () => standing.get()!,
  }
}
