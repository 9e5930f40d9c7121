import type { Evidence } from '../rules/types.ts'
import { IN_STATISTICS } from './decisions.ts'
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

/** A rule on a sample on an instrument, or (sample null) on the instrument whatever it measures. */
export interface RuleSubject {
  readonly rule: string
  readonly sample: string | null
  readonly instrument: string
}

/** What rules said of spectra. */
export const judgements = (db: Db) => {
  const add = db.prepare(
    `INSERT INTO judgement (spectrum, rule, outcome, what, occasion, evidence, at) VALUES (?, ?, ?, ?, ?, ?, ?)`,
  )
  // replicates of one occasion are judged each time one comes: the last word counts
  const decidedBefore = db.prepare<
    RuleSubject & { before: number; limit: number },
    { outcome: JudgedAs; occasion: number }
  >(
    `SELECT j.outcome, j.occasion, max(j.id) FROM judgement j JOIN spectrum_now s ON s.id = j.spectrum
      WHERE (@sample IS NULL OR s.sample = @sample) AND s.instrument = @instrument AND s.measured_at < @before
        AND j.rule = @rule AND j.occasion < @before AND j.outcome NOT IN ('gathering', 'undecided')
        AND j.id > s.judged_before AND ${IN_STATISTICS}
      GROUP BY j.occasion ORDER BY j.occasion DESC LIMIT @limit`,
  )
  const later = db.prepare<RuleSubject & { after: number }, { n: number }>(
    `SELECT count(*) AS n FROM spectrum_now s JOIN judgement j ON j.spectrum = s.id
      WHERE (@sample IS NULL OR s.sample = @sample) AND s.instrument = @instrument AND s.measured_at > @after
        AND j.rule = @rule AND j.occasion > @after AND j.outcome NOT IN ('gathering', 'undecided')
        AND j.id > s.judged_before AND ${IN_STATISTICS}`,
  )

  return {
    add: (row: NewJudgement): void => {
      add.run(row.spectrum, row.rule, row.outcome, row.what, row.occasion, JSON.stringify(row.evidence), row.at)
    },

    /** Decided outcomes of earlier occasions, newest first; those of excluded or reassigned spectra left out. */
    decidedBefore: (
      of: RuleSubject,
      occasion: number,
      limit: number,
    ): readonly { readonly outcome: JudgedAs; readonly occasion: number }[] =>
      decidedBefore.all({ ...of, before: occasion, limit }),

    /** Whether an occasion after this one has been decided already. */
    hasLater: (of: RuleSubject, occasion: number): boolean => (later.get({ ...of, after: occasion })?.n ?? 0) > 0,
  }
}
