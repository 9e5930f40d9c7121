import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { compileRule } from '../../src/rules/index.ts'
import { NAMES } from '../../src/rules/vocabulary.ts'
import { definition, faultsOf } from './fixtures.ts'

describe('a text that is no rule', () => {
  it.each([
    ...['[1:1e9]', '1:1e9', '1:3 > 2', 'createUnit("x")', 'f(x) = x^2', 'f(x)=1', 'x = 1', 'nu1 = 3 cm^-1'],
    ...['import({a: 1})', 'evaluate("1")', 'parse("1")', 'simplify("x")', 'derivative("x", "x")', 'compile("1")'],
    ...[
      'config({})',
      'help(abs)',
      'nu1.constructor',
      'constructor > 1',
      '__proto__ > 1',
      'toString > 1',
      'toString(1)',
    ],
    ...['cos(1) > 0', 'random() > 0', 'factorial(170) > 1', '5! > 3', "nu1' > 3 cm^-1", '5% > 1', '5 % 3 > 1'],
    ...['5 mod 3 > 1', 'nu1 to nm', 'nu1 in nm', 'true', 'false or true', 'null == null', 'NaN > 1', 'Infinity > 1'],
    ...['pi > 3', 'e > 2', 'i > 2', 'a xor b', '1 | 2', '1 & 2', '~1 > 0', '1 << 2 > 1', '1 ?? 2', '1 .* 2 > 1'],
    ...[
      '"text" == "text"',
      "'a' == 'a'",
      '{a: 1}',
      '[1, 2]',
      'nu1[1] > 1',
      '1; 2 > 1',
      '1 > 0 # comment',
      '1 > 0 \n 1',
    ],
    ...['0x10 > 1', '0b11 > 1', '1e400 > 1', '1i > 0', '+1 > 0', '1..2 > 1', '5 > ', '(', ')', '()', '1 > 2)', ''],
    ...['nu1 > 3 cm^-1 cm', 'nu1 > m', 'nu1 > 1 furlong', 'nu7 > 1 cm^-1', 'nu1a > 1 cm^-1', 'nu1 nu2 > 1 cm^-2'],
    ...['hours > 3', 'nu1 (3) > 2 cm^-1', '5 h 30 min > age', 'unit("5 cm")', 'matrix()', 'abs > 1', 'and', '? :'],
    ...['\u0000', '1 > 0\u0000', '\ud800', '１ > ０', 'ｎu1 > 1', '💥 > 1', 'nu1 ＞ 1', 'u(u(nu1)) > 1 cm^-1'],
  ])('is refused with a place and a remedy: %j', (text) => {
    const [fault] = faultsOf(text)
    expect(fault).toBeDefined()
    expect(fault!.place.at).toBe('rules/trial.yaml')
    expect(fault!.what).not.toBe('')
    expect(fault!.remedy).not.toBe('')
  })

  it('is refused at once, however long or deep', () => {
    const big = 100_000
    const texts = [
      '('.repeat(big),
      `${'('.repeat(900)}1${')'.repeat(900)} > 0`,
      `${'not '.repeat(450)}(1 > 0)`.repeat(2),
      `${'-'.repeat(1900)}1 > 0`,
      `${'1+'.repeat(big / 2)}1 > 0`,
      `${'1^'.repeat(950)}1 > 0`,
      `${'1 > 0 ? '.repeat(200)}1 > 0`,
      `${'abs('.repeat(400)}1${')'.repeat(400)} > 0`,
      'x'.repeat(big),
      ' '.repeat(big),
      `1 > 0${' '.repeat(big)}`,
      '9'.repeat(big),
      '\n'.repeat(big),
    ]
    const begun = performance.now()
    for (const text of texts) expect(faultsOf(text).length, text.slice(0, 20)).toBeGreaterThan(0)
    expect(performance.now() - begun).toBeLessThan(1000)
  })

  it('is never executed and never throws, whatever its characters', () => {
    const words = [...NAMES.keys(), 'u', 'mean', 'reference', 'and', 'or', 'not', 'cm', 'h', 'constructor', '__proto__']
    const piece = fc.oneof(
      fc.constantFrom(...words),
      fc.constantFrom(...'+-*/^<>=!?:(),.[]{}"\'#;%|&~@ \n'.split(''), '==', '<=', '>=', '1', '0', '5e3', '.5', '2.'),
      fc.string({ unit: 'binary', maxLength: 4 }),
    )
    fc.assert(
      fc.property(fc.array(piece, { maxLength: 30 }), (pieces) => {
        const compilation = compileRule(definition(pieces.join(' ')))
        expect(['compiled', 'refused']).toContain(compilation.kind)
        if (compilation.kind === 'refused')
          for (const { place } of compilation.faults) {
            const span = pieces.join(' ').length
            expect((place.column ?? 12) - 12).toBeLessThanOrEqual(span)
          }
      }),
      { numRuns: 3000 },
    )
  })
})
