import { readFileSync, writeFileSync } from 'node:fs'
import Database from 'better-sqlite3'
import { describe, expect, it } from 'vitest'
import { spectrumText, type TestRoom, testRoom } from '../daemon/house.ts'

const moved = (perCm: number, seed: number): string =>
  spectrumText({
    bands: [
      [19531 + perCm, 3500, 0.45],
      [26667 + perCm, 3900, 0.47],
    ],
    seed,
  })

const measure = async (room: TestRoom, hours: readonly number[], perCm: number): Promise<void> => {
  for (const hour of hours) room.drop(`AGE-1_20260302T${String(hour).padStart(2, '0')}00.csv`, moved(perCm, hour))
  expect((await room.run(['run', '--once'])).code).toBe(0)
}

const history = (room: TestRoom) =>
  room.rows<{ recipe: string; nu1_cm1: number }>('SELECT recipe, nu1_cm1 FROM history ORDER BY measured_at')
const rowsOf = (room: TestRoom, table: string) => room.rows(`SELECT * FROM ${table}`).length

describe('tendq reanalyse', () => {
  it('fits all spectra with a recipe chosen anew, keeps the old analyses and who decided why, and raises no alarm', async () => {
    const room = testRoom()
    await measure(room, [0, 1, 2, 3, 4], 0)
    const before = history(room)
    expect(new Set(before.map(({ recipe }) => recipe)).size).toBe(1)
    const analyses = rowsOf(room, 'analysis')
    const species = `${room.config}/species/chloro.yaml`
    writeFileSync(
      species,
      readFileSync(species, 'utf8').replace('within: 15 nm }', 'within: 15 nm, shape: log-normal }'),
    )
    const run = await room.run(['reanalyse', 'AGE-1', '--by', 'Ines', '--why', 'the first band is skewed'])
    expect(run.stderr).toBe('')
    expect(run.code).toBe(0)
    expect(run.stdout).toMatch(/^AGE-1 on uv1: 5 spectra fitted with the new recipe 1 gaussian \+ 1 log-normal/)
    const after = history(room)
    expect(after.every(({ recipe }) => recipe === after[0]!.recipe && recipe !== before[0]!.recipe)).toBe(true)
    expect(Math.max(...after.map(({ nu1_cm1 }, i) => Math.abs(nu1_cm1 - before[i]!.nu1_cm1)))).toBeLessThan(60)
    expect(rowsOf(room, 'analysis')).toBe(analyses + 5)
    expect(rowsOf(room, 'alarm_list')).toBe(0)
    expect(room.rows('SELECT by, what, subject, why FROM decisions')).toEqual([
      { by: 'Ines', what: 'reanalyse', subject: 'sample AGE-1 on uv1', why: 'the first band is skewed' },
    ])

    // from now on spectra are fitted and judged by the new recipe
    await measure(room, [5], 0)
    expect(history(room).at(-1)!.recipe).toBe(after[0]!.recipe)
    expect(rowsOf(room, 'alarm_list')).toBe(0)
    await measure(room, [6, 7], 300)
    expect(rowsOf(room, 'alarm_list')).toBe(1)
  })

  it('with --keep-recipe repeats the numbers, and is what status asks for where an earlier engine analysed', async () => {
    const room = testRoom()
    await measure(room, [0, 1, 2, 3], 0)
    const before = history(room)
    const db = new Database(`${room.data}/tendq.db`)
    for (const { name } of db
      .prepare(`SELECT name FROM sqlite_master WHERE type = 'trigger' AND tbl_name = 'analysis'`)
      .all() as { name: string }[])
      db.exec(`DROP TRIGGER "${name}"`)
    db.exec(`UPDATE analysis SET engine = 'an earlier one'`)
    db.close()
    expect((await room.run(['status'])).stdout).toMatch(/1 sample has spectra that an earlier engine analysed/)
    const run = await room.run(['reanalyse', '--all', '--keep-recipe', '--by', 'Ines', '--why', 'upgrade'])
    expect(run.stdout).toBe('AGE-1 on uv1: 4 spectra fitted with the recipe as before, 2 gaussian + constant\n')
    expect((await room.run(['status'])).stdout).not.toMatch(/earlier engine/)
    expect(history(room)).toEqual(before)

    const who = ['--by', 'Ines', '--why', 'x']
    expect((await room.run(['reanalyse', ...who])).stderr).toMatch(/which samples; name them, or say --all/)
    const unknown = await room.run(['reanalyse', 'NOBODY', ...who])
    expect(unknown.code).toBe(64)
    expect(unknown.stderr).toMatch(/^NOBODY: no spectrum of this sample is stored/)
    expect((await room.run(['reanalyse', 'AGE-1'])).code).toBe(64)
  })
})
