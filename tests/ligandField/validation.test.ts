import { describe, expect, it } from 'vitest'
import { findIon } from '../../src/chemistry/ions.ts'
import { type ParameterFit, solveParameters } from '../../src/ligandField/index.ts'
import { PUBLISHED, type Published } from './published.ts'

/** What reading a maximum off a printed spectrum is worth, cm⁻¹. */
const READING = 100

const solve = (published: Published, roles: readonly string[]): ParameterFit => {
  const found = findIon(published.ion)
  if (found.kind !== 'found') throw new Error(published.ion)
  const bands = roles.map((role) => ({ role, positionPerCm: published.bands[role]! }))
  const covariance = bands.map((_, i) => bands.map((_, j) => (i === j ? READING ** 2 : 0)))
  return solveParameters(found.ion, published.geometry ?? 'octahedral', null, bands, covariance)
}

/** The fewest bands that give Δ and B, and all of them where there are more. */
const solveBoth = (published: Published): { readonly few: ParameterFit; readonly all: ParameterFit | null } => {
  const roles = Object.keys(published.bands)
  const isFive = published.ion === 'Mn2+'
  const few = solve(published, isFive ? roles : roles.slice(0, 2))
  return { few, all: roles.length > 2 && !isFive ? solve(published, roles) : null }
}

const say = (value: number | null, u: number | null): string =>
  value === null ? '–' : `${value.toFixed(0)} ± ${u!.toFixed(0)}`

const pair = (fit: ParameterFit | null): string =>
  fit === null ? '' : `${say(fit.deltaPerCm, fit.uDeltaPerCm)} / ${say(fit.bPerCm, fit.uBPerCm)}`

const document = (): string => {
  const rows = PUBLISHED.map((published) => {
    const { few, all } = solveBoth(published)
    const bands = Object.entries(published.bands).map(([role, at]) => `${role} ${at}`)
    const flags = [...new Set([...few.flags, ...(all?.flags ?? [])])].join(', ')
    return `| ${published.complex} | ${bands.join(', ')} | ${published.deltaPerCm} / ${published.bPerCm ?? '–'} | ${pair(few)} | ${pair(all)} | ${flags} | ${published.note ?? ''} |`
  })
  return [
    '# Published complexes, computed again',
    '',
    'Made by `tests/ligandField/validation.test.ts` from `tests/ligandField/published.ts`; the test fails when this page and the',
    'program disagree. cm⁻¹ throughout. Maxima and printed values are mostly from memory of the usual tables (named in',
    `\`published.ts\`). Every maximum counts as known to ${READING} cm⁻¹; ± is one standard uncertainty. “Two bands” means the first`,
    'two listed (all five for d5, the one there is for one-parameter ions); the last figures use all bands, weighed alike, with ±',
    'widened where the model misses them.',
    '',
    '| complex | bands | printed Δ / B | from two bands | from all bands | flags | why they differ |',
    '| --- | --- | --- | --- | --- | --- | --- |',
    ...rows,
    '',
  ].join('\n')
}

const off = (value: number | null, printed: number | null): number =>
  value === null || printed === null ? 0 : Math.abs(value / printed - 1)

describe('published parameters', () => {
  it('cover at least 25 complexes of at least eight ions', () => {
    expect(PUBLISHED.length).toBeGreaterThanOrEqual(25)
    expect(new Set(PUBLISHED.map(({ ion }) => ion)).size).toBeGreaterThanOrEqual(8)
  })
  for (const published of PUBLISHED)
    it(`of ${published.complex} come out of its bands${published.note === undefined ? '' : ', within what the note explains'}`, () => {
      const { few, all } = solveBoth(published)
      const best = all ?? few
      const explained = published.note !== undefined
      expect(off(best.deltaPerCm, published.deltaPerCm)).toBeLessThan(explained ? 0.06 : 0.03)
      expect(off(best.bPerCm, published.bPerCm)).toBeLessThan(explained ? 0.16 : 0.06)
    })
  it('are what docs/validation.md shows', async () => {
    await expect(document()).toMatchFileSnapshot('../../docs/validation.md')
  })
})
