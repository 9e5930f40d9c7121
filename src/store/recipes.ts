import { createHash } from 'node:crypto'
import type { LockedRecipe } from '../analysis/types.ts'
import type { Db } from './open.ts'

export interface RecipeState {
  readonly sha256: string
  readonly locked: boolean
  readonly recipe: LockedRecipe
}

/** Recipes, which sample is fitted with which, and the frozen references. */
export const recipes = (db: Db) => {
  const addRecipe = db.prepare(`INSERT INTO recipe (sha256, name, body) VALUES (?, ?, ?)`)
  const hasRecipe = db.prepare(`SELECT 1 FROM recipe WHERE sha256 = ?`)
  const choose = db.prepare(
    `INSERT INTO recipe_choice (sample, instrument, recipe, locked, spectra, why, at) VALUES (?, ?, ?, ?, ?, ?, ?)`,
  )
  const chosen = db.prepare<[string, string], { sha256: string; locked: number; body: string }>(
    `SELECT c.recipe AS sha256, c.locked, r.body FROM recipe_choice c JOIN recipe r ON r.sha256 = c.recipe
      WHERE c.sample = ? AND c.instrument = ? ORDER BY c.id DESC LIMIT 1`,
  )
  const freeze = db.prepare(
    `INSERT INTO reference_set (sample, instrument, spectra, at, decision) VALUES (?, ?, ?, ?, ?)`,
  )
  const frozen = db.prepare<[string, string], { spectra: string }>(
    `SELECT spectra FROM reference_set WHERE sample = ? AND instrument = ? ORDER BY id DESC LIMIT 1`,
  )

  return {
    /** The recipe in force for a sample on an instrument. */
    of: (sample: string, instrument: string): RecipeState | null => {
      const row = chosen.get(sample, instrument)
      if (row === undefined) return null
      return { sha256: row.sha256, locked: row.locked === 1, recipe: JSON.parse(row.body) as LockedRecipe }
    },

    /** Puts a recipe in force and returns its hash. */
    choose: (
      sample: string,
      instrument: string,
      recipe: LockedRecipe,
      { locked, spectra, why, at }: { locked: boolean; spectra: readonly number[]; why: string; at: number },
    ): string => {
      const body = JSON.stringify(recipe)
      const sha256 = createHash('sha256').update(body).digest('hex')
      if (hasRecipe.get(sha256) === undefined) addRecipe.run(sha256, recipe.recipe.name, body)
      choose.run(sample, instrument, sha256, locked ? 1 : 0, JSON.stringify(spectra), why, at)
      return sha256
    },

    /** `decision`: of the person who approved it; null where it was complete and without a slope. */
    freezeReference: (
      sample: string,
      instrument: string,
      spectra: readonly number[],
      at: number,
      decision: number | null = null,
    ): void => {
      freeze.run(sample, instrument, JSON.stringify(spectra), at, decision)
    },

    /** Ids of the spectra of a frozen reference; null while it is still gathering. */
    frozenReference: (sample: string, instrument: string): readonly number[] | null => {
      const row = frozen.get(sample, instrument)
      return row === undefined ? null : (JSON.parse(row.spectra) as number[])
    },
  }
}
