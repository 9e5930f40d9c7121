import { describe, expect, it } from 'vitest'
import type { RuleDefinition } from '../../src/config/types.ts'
import { compileRule, judgeOverdue, judgeOverdueSchedule } from '../../src/rules/index.ts'
import type { Standing, Window } from '../../src/series/types.ts'
import { definition, HOUR, windowOf } from './fixtures.ts'

const always = (rule: 'unjudged' | 'not-this-species', window: Window) => {
  const compilation = compileRule({ ...definition(''), condition: { kind: 'always', rule } } satisfies RuleDefinition)
  if (compilation.kind === 'refused') throw new Error('refused')
  return compilation.rule.judge(window).outcome.kind
}

/** Chloropentaamminechromium(III), bands at 512 and 375 nm (from memory), as a configuration would expect them. */
const EXPECTED: Standing['expected'] = [
  { role: 'nu1', nearPerCm: 19526, withinPerCm: 570 },
  { role: 'nu2', nearPerCm: 26659, withinPerCm: 710 },
]
const seen = (values: Readonly<Record<string, number | null>>, standing: Partial<Standing> = {}) =>
  windowOf([values], { standing: { fit: 'fitted', undecided: [], expected: EXPECTED, ...standing } })

describe('not-this-species', () => {
  const judge = (window: Window) => always('not-this-species', window)
  it('clears for the species itself, and rings for hexaaqua-, hexaammine- and hexacyanochromate in its place', () => {
    expect(judge(seen({ nu1: 19500, nu2: 26700, height1: 0.4, noise: 0.001 }))).toBe('clears')
    // Band maxima of [Cr(H2O)6]3+, [Cr(NH3)6]3+ and [Cr(CN)6]3-, from memory.
    expect(judge(seen({ nu1: 17400, nu2: 24600 }))).toBe('rings')
    expect(judge(seen({ nu1: 21550, nu2: 28500 }))).toBe('rings')
    expect(judge(seen({ nu1: 26600, nu2: 32600 }))).toBe('rings')
  })
  it('does not ring for a sample that turns into its aqua complex (480 and 360 nm, from memory)', () => {
    expect(judge(seen({ nu1: 20828, nu2: 27770 }))).not.toBe('rings')
  })
  it('rings for a blank: no band, or bands that drown in the noise', () => {
    expect(judge(seen({}, { fit: 'no-band' }))).toBe('rings')
    expect(judge(seen({ nu1: null, nu2: null }))).toBe('rings')
    expect(judge(seen({ nu1: 19500, nu2: 26700, height1: 0.002, height2: 0.001, noise: 0.001 }))).toBe('rings')
  })
  it('does not ring for one lost band while the other stands in its place', () => {
    expect(judge(seen({ nu1: 19500, nu2: null }))).toBe('clears')
  })
  it('without expected bands looks only whether there is a band', () => {
    expect(judge(seen({ nu1: 17400 }, { expected: [] }))).toBe('clears')
    expect(judge(seen({ nu1: null }, { expected: [] }))).toBe('rings')
  })
  it('cannot be decided where the fit failed, or nothing is known of it', () => {
    expect(judge(seen({}, { fit: 'unfitted' }))).toBe('undecided')
    expect(judge(windowOf([{ nu1: 17400 }]))).toBe('undecided')
  })
})

describe('unjudged', () => {
  const judge = (window: Window) => always('unjudged', window)
  it('rings for a spectrum that could not be fitted, or a rule that stayed undecided', () => {
    expect(judge(seen({}, { fit: 'unfitted' }))).toBe('rings')
    expect(judge(seen({ nu1: 1 }, { undecided: ['first-band-shift'] }))).toBe('rings')
    expect(judge(seen({ nu1: 1 }))).toBe('clears')
  })
})

describe('overdue', () => {
  it('rings when nothing came for more than twice the interval', () => {
    expect(judgeOverdue(2, 6 * HOUR, 0, 12 * HOUR).kind).toBe('clears')
    expect(judgeOverdue(2, 6 * HOUR, 0, 12 * HOUR + 1).kind).toBe('rings')
    expect(judgeOverdue(2, 6 * HOUR, null, 0)).toMatchObject({ kind: 'undecided', because: 'gathering' })
  })
  it('on a schedule of 0, 1, 3 and 7 days rings for the latest day that was missed', () => {
    const day = 24 * HOUR
    const schedule = { began: 0, agesMs: [0, day, 3 * day, 7 * day] }
    const at = (last: number | null, now: number) => judgeOverdueSchedule(2, schedule, last, now).kind
    expect(at(null, day)).toBe('clears')
    expect(at(null, 2 * day + 1)).toBe('rings')
    expect(at(day, 4 * day)).toBe('clears')
    expect(at(day, 5 * day + 1)).toBe('rings')
    expect(at(3 * day, 10 * day)).toBe('clears')
    expect(at(3 * day, 11 * day + 1)).toBe('rings')
    expect(at(7 * day, 100 * day)).toBe('clears')
  })
})
