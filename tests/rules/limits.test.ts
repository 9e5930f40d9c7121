import { expect, test } from 'vitest'
import type { RuleDefinition } from '../../src/config/types.ts'
import { compileRule } from '../../src/rules/index.ts'
import { limitsOf } from '../../src/rules/limits.ts'
import type { Window } from '../../src/series/types.ts'

const ruleOf = (when: string) => {
  const place = { at: 'rules.yaml' }
  const definition: RuleDefinition = {
    ...{ name: 'r', title: 'r', of: 'sample', studies: ['*'], persist: 1, priority: 'low', latch: false, place },
    condition: { kind: 'expression', when: { text: when, place }, clear: null },
  }
  const compiled = compileRule(definition)
  if (compiled.kind === 'refused') throw new Error(JSON.stringify(compiled.faults))
  return compiled.rule
}

const window: Window = {
  occasions: [
    {
      at: 1,
      receivedAt: 1,
      spectra: [1],
      values: { nu1: 20100, height1: 0.5 },
      u: { nu1: 3, height1: 0.001 },
      absorbanceAt: () => null,
    },
  ],
  reference: {
    ...{ kind: 'ready', values: { nu1: 20000, height1: 0.5 }, u: { nu1: 4, height1: 0.001 }, occasions: 5, until: 0 },
    absorbanceAt: () => null,
  },
  ...{ began: null, temperatureC: null, pathMm: null, concentrationMolPerL: null, medium: 'air' },
}

test('the limits of a rule are where it begins to ring, found by asking it', () => {
  const both = limitsOf(
    ruleOf('abs(nu1 - reference(nu1)) > max(4 * sqrt(u(nu1)^2 + u_reference(nu1)^2), 60 cm^-1)'),
    window,
    'nu1',
  )
  expect(both.below).toBeCloseTo(19940, 6)
  expect(both.above).toBeCloseTo(20060, 6)
  const tighter = limitsOf(ruleOf('abs(nu1 - reference(nu1)) > 4 * sqrt(u(nu1)^2 + u_reference(nu1)^2)'), window, 'nu1')
  expect(tighter.above).toBeCloseTo(20020, 6) // 4 · √(3² + 4²) = 20
  expect(limitsOf(ruleOf('height1 < 0.9 * reference(height1)'), window, 'height1')).toEqual({
    below: expect.closeTo(0.45, 6),
    above: null,
  })
})

test('there are none where the rule does not look at the quantity, or rings at the reference itself', () => {
  expect(limitsOf(ruleOf('nu1 > 20050 cm^-1'), window, 'height1')).toEqual({ below: null, above: null })
  expect(limitsOf(ruleOf('nu1 > 100 cm^-1'), window, 'nu1')).toEqual({ below: null, above: null })
})
