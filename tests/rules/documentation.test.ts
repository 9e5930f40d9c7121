import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { FUNCTIONS, NAMES } from '../../src/rules/vocabulary.ts'
import { BEGAN, faultsOf, HOUR, judged, occasion, reference, windowOf } from './fixtures.ts'

const TEXT = readFileSync(new URL('../../docs/rules.md', import.meta.url), 'utf8')
const rows = TEXT.split('\n')
  .filter((line) => line.startsWith('| '))
  .map((line) => line.slice(2, -2).split(' | '))

/** The example series as the page prints it. */
const SERIES = rows.filter(([at]) => /^\d+ h$/.test(at!))
const HEAD = rows.find(([at]) => at === 'at')!
const window = windowOf([], {
  occasions: SERIES.map(([at, ...cells]) => {
    const number = (cell: string) => (cell === '–' ? null : Number(cell))
    const all = Object.fromEntries(cells.map((cell, i) => [HEAD[i + 1]!, number(cell)]))
    const { 'u(nu1)': u, ...values } = all
    const one = occasion(BEGAN + Number.parseInt(at!, 10) * HOUR, values, { nu1: u! })
    return { ...one, absorbanceAt: (nm: number) => (nm === 575 ? 0.31 : null) }
  }),
  reference: {
    ...(reference({ nu1: 19530, height1: 0.43 }, { nu1: 2.3, height1: 0.0006 }, BEGAN + 12 * HOUR) as object),
    absorbanceAt: (nm: number) => (nm === 575 ? 0.3 : null),
  } as ReturnType<typeof reference>,
})

const examples = rows.flatMap((cells) => {
  const outcome = /(rings|clears|missing|gathering)$/.exec(cells.at(-1)!)?.[1]
  const when = /^`(.+)`$/.exec(cells.at(-2) ?? '')?.[1]
  return outcome !== undefined && when !== undefined ? [{ when, outcome }] : []
})

describe('docs/rules.md', () => {
  it.each(examples)('$when: $outcome', ({ when, outcome }) => expect(judged(when, window)).toBe(outcome))
  it('has a worked example for every name and function', () => {
    const written = examples.map(({ when }) => when).join('\n')
    const oneOfSix = (name: string) => name.replace(/^(nu|max|width|height)[2-6]$/, '$11')
    for (const name of NAMES.keys()) expect(written, name).toMatch(new RegExp(`\\b${oneOfSix(name)}\\b`))
    for (const name of FUNCTIONS.keys()) expect(written, name).toContain(`${name}(`)
    expect(examples.length).toBeGreaterThan(55)
  })
  it('names what is refused, and it is', () => {
    const refused = rows.slice(
      rows.findIndex(([head]) => head === 'expression') + 2,
      rows.findIndex(([head]) => head === 'example'),
    )
    expect(refused.length).toBe(8)
    for (const [expression] of refused) expect(faultsOf(expression!.slice(1, -1)).length, expression).toBeGreaterThan(0)
  })
  it('has expressions in its YAML that compile', () => {
    const written = [...TEXT.matchAll(/(?:when|clear): "(.+)"/g)].map(([, text]) => text!)
    expect(written.length).toBe(2)
    for (const text of written) expect(faultsOf(text)).toEqual([])
  })
})
