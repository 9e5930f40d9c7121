import { existsSync } from 'node:fs'
import Database from 'better-sqlite3'

export interface KeptRow {
  readonly spectrum: number
  readonly sample: string
  readonly measured_at: string
  readonly nu1_cm1: number | null
  readonly nu2_cm1: number | null
  readonly delta_cm1: number | null
  readonly u_delta_cm1: number | null
  readonly b_cm1: number | null
  readonly u_b_cm1: number | null
  readonly judgement: string | null
}

export interface AlarmRow {
  readonly id: number
  readonly rule: string
  readonly subject: string
  readonly priority: string
  readonly state: string
  readonly message: string
}

export interface Observer {
  /** Spectra kept since the last look, oldest first. */
  newSpectra(): readonly KeptRow[]
  /** Every alarm that has ever rung. */
  alarms(): readonly AlarmRow[]
  /** Files that were set aside, with the reason. */
  setAside(): readonly { readonly file: string; readonly reason: string }[]
  close(): void
}

/** Looks at the daemon's database from outside, through the views that everybody may use. Null while there is none yet. */
export const observe = (database: string): Observer | null => {
  if (!existsSync(database)) return null
  let db: Database.Database | null = null
  try {
    db = new Database(database, { readonly: true, fileMustExist: true, timeout: 2_000 })
    const spectra = db.prepare<[number], KeptRow>(
      `SELECT spectrum, sample, measured_at, nu1_cm1, nu2_cm1, delta_cm1, u_delta_cm1, b_cm1, u_b_cm1, judgement
         FROM history WHERE spectrum > ? ORDER BY spectrum`,
    )
    const alarms = db.prepare<[], AlarmRow>(
      `SELECT id, rule, subject, priority, state, message FROM alarm_list WHERE raised_at IS NOT NULL ORDER BY id`,
    )
    const setAside = db.prepare<[], { file: string; reason: string }>(
      `SELECT file, reason FROM intake WHERE outcome = 'rejected'`,
    )
    const opened = db
    let seen = 0
    return {
      newSpectra: () => {
        const rows = spectra.all(seen)
        seen = rows.at(-1)?.spectrum ?? seen
        return rows
      },
      alarms: () => alarms.all(),
      setAside: () => setAside.all(),
      close: () => opened.close(),
    }
  } catch {
    db?.close() // the daemon has not made its tables yet
    return null
  }
}
