import type { AlarmLife, AlarmState } from '../alarms/types.ts'
import type { Priority } from '../config/types.ts'
import type { Db } from './open.ts'

export interface AlarmKey {
  readonly rule: string
  readonly of: 'sample' | 'instrument' | 'study'
  readonly subject: string
}

export interface StoredAlarm extends AlarmKey {
  readonly id: number
  readonly study: string | null
  readonly priority: Priority
  readonly state: AlarmState
  readonly active: boolean
  readonly latch: boolean
  /** Went silent while it waited for its reset. */
  readonly latched: boolean
  /** End of shelving; null when it is not shelved. */
  readonly shelvedUntil: number | null
  readonly raisedAt: number | null
  readonly acknowledgedAt: number | null
  readonly acknowledgedBy: string | null
  readonly returnedAt: number | null
  readonly spectra: number
  readonly diagnosis: string | null
  readonly confidence: number | null
  readonly message: string
}

interface AlarmRow {
  id: number
  rule: string
  of: string
  subject: string
  study: string | null
  priority: string
  state: string
  active: number
  latch: number
  latched: number
  shelved_until: number | null
  raised_at: number | null
  acknowledged_at: number | null
  acknowledged_by: string | null
  returned_at: number | null
  spectra: number
  diagnosis: string | null
  confidence: number | null
  message: string
}

const fromRow = (row: AlarmRow): StoredAlarm => ({
  id: row.id,
  rule: row.rule,
  of: row.of as AlarmKey['of'],
  subject: row.subject,
  study: row.study,
  priority: row.priority as Priority,
  state: row.state as AlarmState,
  active: row.active === 1,
  latch: row.latch === 1,
  latched: row.latched === 1,
  shelvedUntil: row.shelved_until,
  raisedAt: row.raised_at,
  acknowledgedAt: row.acknowledged_at,
  acknowledgedBy: row.acknowledged_by,
  returnedAt: row.returned_at,
  spectra: row.spectra,
  diagnosis: row.diagnosis,
  confidence: row.confidence,
  message: row.message,
})

/** What the alarm's transitions look at. */
export const lifeOf = ({ state, active, latch, latched }: Omit<StoredAlarm, 'id'>): AlarmLife => ({
  state,
  active,
  consecutive: 0, // rows of occasions are counted from the judgements
  latch,
  ...(latched ? { latched } : {}),
})

/** The alarm after a transition. */
export const withLife = <Alarm extends Omit<StoredAlarm, 'id'>>(alarm: Alarm, life: AlarmLife): Alarm => ({
  ...alarm,
  state: life.state,
  active: life.active,
  latched: life.latched === true,
  shelvedUntil: life.state === 'shelved' ? alarm.shelvedUntil : null,
})

/** The alarm list and the events that made it. State lives here and nowhere else. */
export const alarmList = (db: Db) => {
  const byKey = db.prepare<[string, string, string], AlarmRow>(
    `SELECT * FROM alarm WHERE rule = ? AND of = ? AND subject = ?`,
  )
  const byId = db.prepare<[number], AlarmRow>(`SELECT * FROM alarm WHERE id = ?`)
  const active = db.prepare<[], AlarmRow>(`SELECT * FROM alarm WHERE state <> 'normal' ORDER BY id`)
  const every = db.prepare<[], AlarmRow>(`SELECT * FROM alarm ORDER BY id`)
  const put = db.prepare(
    `INSERT INTO alarm (rule, of, subject, study, priority, state, active, latch, latched, shelved_until, raised_at, acknowledged_at,
                        acknowledged_by, returned_at, spectra, diagnosis, confidence, message)
     VALUES (@rule, @of, @subject, @study, @priority, @state, @active, @latch, @latched, @shelved_until, @raised_at, @acknowledged_at,
             @acknowledged_by, @returned_at, @spectra, @diagnosis, @confidence, @message)
     ON CONFLICT (rule, of, subject) DO UPDATE SET
       study = excluded.study, priority = excluded.priority, state = excluded.state, active = excluded.active,
       latch = excluded.latch, latched = excluded.latched, shelved_until = excluded.shelved_until,
       raised_at = excluded.raised_at, acknowledged_at = excluded.acknowledged_at,
       acknowledged_by = excluded.acknowledged_by, returned_at = excluded.returned_at, spectra = excluded.spectra,
       diagnosis = excluded.diagnosis, confidence = excluded.confidence, message = excluded.message
     RETURNING id`,
  )
  const addEvent = db.prepare(`INSERT INTO alarm_event (alarm, at, event, by, note) VALUES (?, ?, ?, ?, ?)`)
  const happened = db.prepare<[number, string, number], { n: number }>(
    `SELECT count(*) AS n FROM alarm_event WHERE alarm = ? AND event = ? AND at >= ?`,
  )
  const notes = db.prepare<[number, string, number], { note: string }>(
    `SELECT note FROM alarm_event WHERE alarm = ? AND event = ? AND at >= ? ORDER BY id`,
  )
  const putWatch = db.prepare(
    `INSERT INTO watch (rule, of, subject, instrument, active) VALUES (?, ?, ?, ?, ?)
     ON CONFLICT (rule, of, subject, instrument) DO UPDATE SET active = excluded.active`,
  )
  const watched = db.prepare<[string, string, string], { instrument: string; active: number }>(
    `SELECT instrument, active FROM watch WHERE rule = ? AND of = ? AND subject = ?`,
  )

  return {
    find: ({ rule, of, subject }: AlarmKey): StoredAlarm | null => {
      const row = byKey.get(rule, of, subject)
      return row === undefined ? null : fromRow(row)
    },

    get: (id: number): StoredAlarm | null => {
      const row = byId.get(id)
      return row === undefined ? null : fromRow(row)
    },

    /** Every alarm that is not in the state `normal`. */
    standing: (): readonly StoredAlarm[] => active.all().map(fromRow),

    /** Every alarm that ever rang. */
    all: (): readonly StoredAlarm[] => every.all().map(fromRow),

    /** Writes the alarm's new state and returns its id. */
    put: (alarm: Omit<StoredAlarm, 'id'>): number =>
      (
        put.get({
          rule: alarm.rule,
          of: alarm.of,
          subject: alarm.subject,
          study: alarm.study,
          priority: alarm.priority,
          state: alarm.state,
          active: alarm.active ? 1 : 0,
          latch: alarm.latch ? 1 : 0,
          latched: alarm.latched ? 1 : 0,
          shelved_until: alarm.shelvedUntil,
          raised_at: alarm.raisedAt,
          acknowledged_at: alarm.acknowledgedAt,
          acknowledged_by: alarm.acknowledgedBy,
          returned_at: alarm.returnedAt,
          spectra: alarm.spectra,
          diagnosis: alarm.diagnosis,
          confidence: alarm.confidence,
          message: alarm.message,
        }) as { id: number }
      ).id,

    event: (alarm: number, at: number, event: string, by: string, note: string): void => {
      addEvent.run(alarm, at, event, by, note)
    },

    /** Whether an event of this kind happened to the alarm since a time. */
    happened: (alarm: number, event: string, since: number): boolean => happened.get(alarm, event, since)!.n > 0,

    /** Notes of the events of this kind since a time, oldest first. */
    notes: (alarm: number, event: string, since: number): readonly string[] =>
      notes.all(alarm, event, since).map(({ note }) => note),

    /** Whether the rule's condition holds on each instrument that measures the subject. */
    watch: ({ rule, of, subject }: AlarmKey): Readonly<Record<string, boolean>> =>
      Object.fromEntries(watched.all(rule, of, subject).map(({ instrument, active }) => [instrument, active === 1])),

    setWatch: ({ rule, of, subject }: AlarmKey, instrument: string, isActive: boolean): void => {
      putWatch.run(rule, of, subject, instrument, isActive ? 1 : 0)
    },
  }
}
