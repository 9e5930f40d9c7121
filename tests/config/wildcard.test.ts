import fc from 'fast-check'
import picomatch from 'picomatch'
import { describe, expect, test } from 'vitest'
import { fits } from '../../src/config/index.ts'
import { commonName } from '../../src/config/wildcard.ts'

const pattern = fc.string({ unit: fc.constantFrom('a', 'b', '*', '?'), minLength: 1, maxLength: 6 })
const name = fc.string({ unit: fc.constantFrom('a', 'b', 'c'), minLength: 1, maxLength: 6 })

describe('names with wildcards', () => {
  test.each([
    ['AGE40-*', 'AGE40-2', true],
    ['AGE40-*', 'AGE40-', true],
    ['AGE40-*', 'age40-2', false],
    ['STOCK-????', 'STOCK-2026', true],
    ['STOCK-????', 'STOCK-202', false],
    ['0012', '0012', true],
    ['0012', '12', false],
    ['[CrCl]*', '[CrCl]-1', true],
    ['*', 'a/b', true],
  ])('%s and %s: %s', (p, n, expected) => expect(fits(p, n)).toBe(expected))

  // picomatch is the outside judge where names hold no slash and no leading dot
  test('a match is what picomatch calls one', () => {
    fc.assert(
      fc.property(pattern, name, (p, n) => {
        const theirs = picomatch.isMatch(n, p.replace(/\*+/g, '*'), {
          noglobstar: true,
          noextglob: true,
          nobrace: true,
        })
        return fits(p, n) === theirs
      }),
      { numRuns: 2000 },
    )
  })

  test('a name that two patterns share fits both, and where none is found no short name fits both', () => {
    const names = ['a', 'b', 'c'].flatMap((x) => [
      x,
      ...['a', 'b', 'c'].flatMap((y) => [x + y, ...['a', 'b', 'c'].map((z) => x + y + z)]),
    ])
    fc.assert(
      fc.property(pattern, pattern, (a, b) => {
        const shared = commonName(a, b)
        return shared === null ? !names.some((n) => fits(a, n) && fits(b, n)) : fits(a, shared) && fits(b, shared)
      }),
      { numRuns: 2000 },
    )
  })

  test('a pattern made to be slow is judged at once', () => {
    const started = performance.now()
    expect(fits(`${'*a'.repeat(60)}b`, 'a'.repeat(200))).toBe(false)
    expect(performance.now() - started).toBeLessThan(500)
  })
})
