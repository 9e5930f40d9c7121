import type { Db } from './open.ts'

export interface DailyLetter {
  /** Of the room's calendar, `2026-03-02`. */
  readonly day: string
  readonly letter: number
  /** What it covers, epoch ms. */
  readonly since: number
  readonly until: number
}

/** Daily letters: one row a day, so that a restart writes none twice. */
export const dailyLetters = (db: Db) => {
  const add = db.prepare(`INSERT INTO daily_letter (day, letter, since, until) VALUES (@day, @letter, @since, @until)`)
  const newest = db.prepare<[], DailyLetter>(`SELECT * FROM daily_letter ORDER BY until DESC LIMIT 1`)
  const firstRun = db.prepare<[], { at: number | null }>(`SELECT min(since) AS at FROM configuration_period`)

  return {
    add: (row: DailyLetter): void => {
      add.run(row)
    },
    newest: (): DailyLetter | null => newest.get() ?? null,
    /** When a configuration first came into force here; null in an empty database. */
    firstRunAt: (): number | null => firstRun.get()?.at ?? null,
  }
}
