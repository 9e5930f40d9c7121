import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { and, not, or, type Truth } from '../../src/rules/frame.ts'
import { BEGAN, compiled, judged, occasion, reference, windowOf } from './fixtures.ts'

/** Kleene's strong logic of indeterminacy (S. C. Kleene, Introduction to Metamathematics, 1952, § 64): t, f, u. */
const KLEENE = {
  and: { tt: 't', tf: 'f', tu: 'u', ft: 'f', ff: 'f', fu: 'f', ut: 'u', uf: 'f', uu: 'u' },
  or: { tt: 't', tf: 't', tu: 't', ft: 't', ff: 'f', fu: 'u', ut: 't', uf: 'u', uu: 'u' },
} as const

/** `nu1` is there, `nu3` is missing. */
const now = windowOf([{ nu1: 19530, nu3: null }])
const TEXT = { t: '1 < 2', f: '1 > 2', u: 'nu3 > 0 cm^-1' }
const LETTER: Readonly<Record<string, string>> = { rings: 't', clears: 'f', missing: 'u' }

describe('conditions are three-valued', () => {
  it.each(['and', 'or'] as const)('%s follows the truth table, in either order', (sign) => {
    for (const [pair, result] of Object.entries(KLEENE[sign])) {
      const [a, b] = [...pair] as ['t' | 'f' | 'u', 't' | 'f' | 'u']
      expect(LETTER[judged(`${TEXT[a]} ${sign} ${TEXT[b]}`, now)], pair).toBe(result)
    }
  })
  it('not undecided is undecided', () => {
    expect(judged(`not (${TEXT.u})`, now)).toBe('missing')
    expect(judged(`not (${TEXT.t})`, now)).toBe('clears')
    expect(judged(`not (${TEXT.f})`, now)).toBe('rings')
  })

  const truth = fc.constantFrom<Truth>(0, 1, 2, 3)
  it('the laws of logic hold for gathering and missing too', () => {
    fc.assert(
      fc.property(truth, truth, truth, (a, b, c) => {
        expect(and(a, b)).toBe(and(b, a))
        expect(or(a, b)).toBe(or(b, a))
        expect(and(a, and(b, c))).toBe(and(and(a, b), c))
        expect(or(a, or(b, c))).toBe(or(or(a, b), c))
        expect(not(and(a, b))).toBe(or(not(a), not(b)))
        expect(not(not(a))).toBe(a)
      }),
    )
  })

  it('a nested condition is decided as the truth tables say, whatever its shape', () => {
    type Node = { readonly text: string; readonly value: 't' | 'f' | 'u' }
    const leaf = fc.constantFrom<Node>(...(['t', 'f', 'u'] as const).map((value) => ({ text: TEXT[value], value })))
    const swapped = { t: 'f', f: 't', u: 'u' } as const
    const { tree } = fc.letrec<{ tree: Node }>((tie) => ({
      tree: fc.oneof(
        { maxDepth: 5 },
        leaf,
        fc.tuple(fc.constantFrom('and' as const, 'or' as const), tie('tree'), tie('tree')).map(([sign, a, b]) => ({
          text: `(${a.text}) ${sign} (${b.text})`,
          value: KLEENE[sign][`${a.value}${b.value}`],
        })),
        tie('tree').map(({ text, value }) => ({ text: `not (${text})`, value: swapped[value] })),
      ),
    }))
    fc.assert(
      fc.property(tree, ({ text, value }) => {
        fc.pre(text.length < 1500)
        expect(LETTER[judged(text, now)]).toBe(value)
      }),
      { numRuns: 300 },
    )
  })
})

describe('undecided', () => {
  it('because the history or the reference does not reach is gathering', () => {
    expect(judged('nu1 > reference(nu1)', now)).toBe('gathering')
    expect(judged('nu1 > previous(nu1)', now)).toBe('gathering')
    expect(judged('nu1 > mean(nu1, 3)', now)).toBe('gathering')
    expect(judged('nu1 > reference(nu1)', { ...now, reference: reference({}) })).toBe('gathering')
  })
  it('because a value is null, or the reference was refused, is missing', () => {
    expect(judged('nu3 > 0 cm^-1', now)).toBe('missing')
    expect(judged('u(nu1) > 0 cm^-1', now)).toBe('missing')
    expect(judged('nu1 > reference(nu1)', { ...now, reference: { kind: 'refused', why: 'slope' } })).toBe('missing')
  })
  it('for both reasons is missing, which somebody must hear of', () => {
    expect(judged('nu3 > reference(nu3)', now)).toBe('missing')
    expect(judged('nu1 > reference(nu1) or nu3 > 0 cm^-1', now)).toBe('missing')
  })
  it('is told for the part that decides, not for one that another overrides', () => {
    expect(judged('nu1 > reference(nu1) or (nu3 > 0 cm^-1 and 1 > 2)', now)).toBe('gathering')
    expect(judged('(nu3 > 0 cm^-1 ? 1 : 2) > 0', now)).toBe('missing')
    expect(judged('(nu1 > reference(nu1) ? 1 : 2) > 0', now)).toBe('gathering')
  })
  it('says what is lacking', () => {
    const what = (when: string) => compiled(when).judge(now).outcome
    expect(what('nu3 > 0 cm^-1')).toMatchObject({ what: 'nu3 has no value' })
    expect(what('nu1 > reference(nu1)')).toMatchObject({ what: 'reference(nu1): the reference has 1 of 5 occasions' })
    expect(what('mean(nu1, 3) > nu1')).toMatchObject({ what: 'mean(nu1, …): 1 of 3 occasions are there' })
  })
  it.each([
    '1 / 0 > 3',
    'sqrt(-1) < 0',
    'log(0) < 0',
    'exp(1000) > 1',
    '0 / 0 == 0',
    'nu3^0 == 1',
    'max(nu3, 5 cm^-1) > 3 cm^-1',
  ])('is what has no finite number: %s', (text) => expect(judged(text, now)).toBe('missing'))
  it('is a value that is no finite number', () => {
    expect(judged('nu1 > 0 cm^-1', windowOf([{ nu1: Number.NaN }]))).toBe('missing')
    expect(judged('nu1 > 0 cm^-1', windowOf([{ nu1: Infinity }]))).toBe('missing')
  })
  it('without any spectrum is gathering', () => expect(judged('1 > 2', { ...now, occasions: [] })).toBe('gathering'))
})

describe('ringing and clearing', () => {
  const at = (nu1: number | null) => ({ ...windowOf([]), occasions: [occasion(BEGAN, { nu1 })] })
  it('without clear, an alarm clears when its condition is false', () => {
    expect(judged('nu1 > 60 cm^-1', at(61))).toBe('rings')
    expect(judged('nu1 > 60 cm^-1', at(60))).toBe('clears')
  })
  it('with clear there is a deadband between ringing and clearing', () => {
    expect(judged('nu1 > 60 cm^-1', at(61), 'nu1 < 30 cm^-1')).toBe('rings')
    expect(judged('nu1 > 60 cm^-1', at(45), 'nu1 < 30 cm^-1')).toBe('holds')
    expect(judged('nu1 > 60 cm^-1', at(29), 'nu1 < 30 cm^-1')).toBe('clears')
    expect(judged('nu1 > 60 cm^-1', at(null), 'nu1 < 30 cm^-1')).toBe('missing')
  })
  it('an undecided condition does not clear, even where clear is true', () => {
    expect(judged('nu3 > 60 cm^-1', at(5), 'nu1 < 30 cm^-1')).toBe('missing')
  })
})
