import type { RuleDefinition } from '../../src/config/types.ts'
import { compileRule } from '../../src/rules/index.ts'
import type { CompiledRule } from '../../src/rules/types.ts'
import type { Occasion, Window } from '../../src/series/types.ts'

/** Six hours, the usual interval. */
export const HOUR = 3_600_000
export const BEGAN = Date.UTC(2026, 2, 2, 9)

/** A rule as the configuration would hand it over; the expression begins at line 4, column 12 of its file. */
export const definition = (when: string, clear: string | null = null): RuleDefinition => ({
  name: 'trial',
  title: 'Trial',
  of: 'sample',
  studies: ['*'],
  persist: 1,
  priority: 'medium',
  latch: false,
  place: { at: 'rules/trial.yaml', line: 3, column: 5 },
  condition: {
    kind: 'expression',
    when: { text: when, place: { at: 'rules/trial.yaml', line: 4, column: 12 } },
    clear: clear === null ? null : { text: clear, place: { at: 'rules/trial.yaml', line: 5, column: 13 } },
  },
})

export const compiled = (when: string, clear: string | null = null): CompiledRule => {
  const compilation = compileRule(definition(when, clear))
  if (compilation.kind === 'refused') throw new Error(JSON.stringify(compilation.faults))
  return compilation.rule
}

export const faultsOf = (when: string) => {
  const compilation = compileRule(definition(when))
  return compilation.kind === 'refused' ? compilation.faults : []
}

type Values = Readonly<Record<string, number | null>>

export const occasion = (at: number, values: Values, u: Values = {}): Occasion => ({
  at,
  receivedAt: at,
  spectra: [at],
  values,
  u,
  absorbanceAt: (nm) => (nm >= 400 && nm <= 800 ? nm / 1000 : null),
})

/** A reference of five occasions with these values. */
export const reference = (values: Values, u: Values = {}, until: number | null = BEGAN): Window['reference'] => ({
  kind: 'ready',
  values,
  u,
  occasions: 5,
  until,
  absorbanceAt: (nm) => (nm >= 400 && nm <= 800 ? nm / 1000 - 0.05 : null),
})

/** Occasions six hours apart, oldest first; the last is judged. */
export const windowOf = (series: readonly Values[], more: Partial<Window> = {}): Window => ({
  occasions: series.map((values, i) => occasion(BEGAN + i * 6 * HOUR, values)),
  reference: { kind: 'gathering', have: 1, need: 5 },
  began: BEGAN,
  temperatureC: 25,
  pathMm: 10,
  concentrationMolPerL: 0.012,
  medium: 'air',
  ...more,
})

/** How a condition is decided: `rings`, `clears`, `holds`, `gathering` or `missing`. */
export const judged = (when: string, window: Window, clear: string | null = null): string => {
  const { outcome } = compiled(when, clear).judge(window)
  return outcome.kind === 'undecided' ? outcome.because : outcome.kind
}
