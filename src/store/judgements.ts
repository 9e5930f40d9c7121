import type { Evidence } from '../rules/types.ts'
import type { Db } from './open.ts'

export type JudgedAs = 'rings' | 'clears' | 'holds' | 'gathering' | 'undecided'

export interface NewJudgement {
  readonly spectrum: number
  readonly rule: string
  readonly outcome: JudgedAs
  /** What could not be decided, or empty. */
  readonly what: string
  /** Time of the occasion's first replicate: replicates count once. */
  readonly occasion: number
  readonly evidence: readonly Evidence[]
  readonly at: number
}

/** What rules said of spectra. */
export const judgements = (db: Db) => {
  const add = db.prepare(
    `INSERT INTO judgement (spectrum, rule, outcome, what, occasion, evidence, at) VALUES (?, ?, ?, ?, ?, ?, ?)`,
  )
  const before = db.prepare<
    { rule: string; sample: string; instrument: string; before: number; limit: number },
    { outcome: JudgedAs; occasion: number }
  >(
    `SELECT j.outcome, j.occasion, max(j.id) AS newest FROM judgement j JOIN spectrum s ON s.id = j.spectrum
      WHERE j.rule = @rule AND s.sample = @sample AND s.instrument = @instrument AND j.occasion < @before
        AND s.measured_at < @before
      GROUP BY j.occasion ORDER BY j.occasion DESC LIMIT @limit`,
  )
  const newestOccasion = db.prepare<[string, string], { at: number | null }>(
    `SELECT max(j.occasion) AS at FROM judgement j JOIN spectrum s ON s.id = j.spectrum
      WHERE s.sample = ? AND s.instrument = ?`,
  )

  return {
    add: (row: NewJudgement): void => {
      add.run(row.spectrum, row.rule, row.outcome, row.what, row.occasion, JSON.stringify(row.evidence), row.at)
    },

    /** Outcomes of earlier occasions, newest first. */
    before: (
      of: { rule: string; sample: string; instrument: string },
      occasion: number,
      limit: number,
    ): readonly { readonly outcome: JudgedAs; readonly occasion: number }[] =>
      before.all({ ...of, before: occasion, limit }),

    /** Time of the newest occasion judged so far; null when there is none. */
    newestOccasion: (sample: string, instrument: string): number | null =>
      newestOccasion.get(sample, instrument)?.at ?? null,
  }
}
