import { spawnSync } from 'node:child_process'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'
import { CLI } from '../daemon/house.ts'

const fixture = (name: string) => fileURLToPath(new URL(`../../fixtures/readers/${name}`, import.meta.url))
const inspect = (...args: readonly string[]) => {
  const { status, stdout, stderr } = spawnSync(process.execPath, [CLI, 'inspect', ...args], { encoding: 'utf8' })
  return {
    code: status,
    stdout,
    stderr,
    rows: () =>
      stdout
        .trim()
        .split('\n')
        .map((line) => JSON.parse(line)),
  }
}

describe('tendq inspect', () => {
  it('says how files would be read: format, dialect, axis, ordinate, sample, time, range, noise and who claims them', () => {
    const { code, rows, stderr } = inspect(
      fixture('good/german-semicolon.csv'),
      fixture('good/jcamp-link.jdx'),
      '--json',
    )
    expect(stderr).toBe('')
    expect(code).toBe(0)
    const [german, first, second] = rows()
    expect(german).toMatchObject({
      index: 0,
      format: 'delimited text',
      dialect: 'semicolon-separated, decimal comma, Windows-1252, 2 columns',
      sample: 'CR-7',
      measured_local: '2026-03-02T09:15:30',
      points: 21,
      x: 'nm',
      x_range: [400, 500],
      medium: 'air',
      y: 'absorbance',
      path: 10,
      temperature: 25,
      warnings: [],
    })
    expect(german.noise).toBeGreaterThan(0)
    expect(german.window_cm1[0]).toBeCloseTo(19994.4, 1)
    expect(german.readers[0]).toEqual({ format: 'delimited text', confidence: german.confidence })
    expect([first.index, second.index]).toEqual([0, 1])
    expect(first.format).toMatch(/^JCAMP-DX/)
    expect(first.confidence).toBe(1)
  })

  it('refuses what could be read in two ways, names both, and gives the lines that settle it; one of them, tried, settles it', () => {
    const { code, stdout, stderr } = inspect(fixture('broken/no-kind.csv'))
    expect(code).toBe(65)
    expect(stderr).toMatch(
      /no-kind\.csv:2:5: nothing says what the ordinate is, and values up to 0\.45 may be absorbance or transmittance; say which/,
    )
    expect(stdout).toContain('reading: { y: absorbance, delimiter: ",", decimal: "." }')
    expect(stdout).toContain('reading: { y: transmittance, delimiter: ",", decimal: "." }')
    const tried = inspect(
      fixture('broken/no-kind.csv'),
      '--y',
      'absorbance',
      '--delimiter',
      ',',
      '--decimal',
      '.',
      '--json',
    )
    expect(tried.code).toBe(0)
    expect(tried.rows()[0].y).toBe('absorbance')
  })

  it('goes on with the other files where one is missing or broken, and says by its exit code that not all was well', () => {
    const missing = inspect('nowhere.csv', fixture('good/plain-comma.csv'), '--json')
    expect(missing.code).toBe(66)
    expect(missing.stderr).toMatch(/^nowhere\.csv: cannot be opened/)
    expect(missing.rows()).toHaveLength(1)
    const broken = inspect(fixture('broken/short-row.csv'), fixture('good/plain-comma.csv'), '--json')
    expect(broken.code).toBe(65)
    expect(broken.rows().map(({ format }) => format)).toEqual(['delimited text', 'delimited text'])
    expect(inspect('--y', 'colour', 'x.csv').code).toBe(64)
  })
})
