import type { Db } from './open.ts'

/** Configurations that were in force, decisions of people, and what the daemon says of itself. */
export const records = (db: Db) => {
  const addText = db.prepare(`INSERT INTO configuration (sha256, text) SELECT @sha256, @text
                               WHERE NOT EXISTS (SELECT 1 FROM configuration WHERE sha256 = @sha256)`)
  const open = db.prepare<[], { sha256: string }>(`SELECT sha256 FROM configuration_period WHERE until IS NULL`)
  const close = db.prepare(`UPDATE configuration_period SET until = ? WHERE until IS NULL`)
  const begin = db.prepare(`INSERT INTO configuration_period (sha256, since) VALUES (?, ?)`)
  const decide = db.prepare(`INSERT INTO decision (at, by, what, subject, why) VALUES (?, ?, ?, ?, ?)`)
  const say = db.prepare(
    `INSERT INTO daemon_state (subject, body, at) VALUES (?, ?, ?)
     ON CONFLICT (subject) DO UPDATE SET body = excluded.body, at = excluded.at`,
  )
  const said = db.prepare<[string], { body: string; at: number }>(`SELECT body, at FROM daemon_state WHERE subject = ?`)

  return {
    /** Notes which configuration is in force from now on. */
    configurationInForce: db.transaction((config: { sha256: string; text: string }, at: number): void => {
      addText.run({ sha256: config.sha256, text: config.text })
      if (open.get()?.sha256 === config.sha256) return
      close.run(at)
      begin.run(config.sha256, at)
    }).immediate,

    /** A person's decision, kept for ever. Returns its number. */
    decide: (at: number, by: string, what: string, subject: string, why: string): number =>
      Number(decide.run(at, by, what, subject, why).lastInsertRowid),

    say: (subject: string, body: unknown, at: number): void => {
      say.run(subject, JSON.stringify(body), at)
    },

    said: <T>(subject: string): { readonly body: T; readonly at: number } | null => {
      const row = said.get(subject)
      return row === undefined ? null : { body: JSON.parse(row.body) as T, at: row.at }
    },
  }
}
