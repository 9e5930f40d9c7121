import type { Study } from '../config/types.ts'
import type { Measured } from './quantities.ts'

export type Verdict = 'pass' | 'look' | 'fail'

/**
 * A study's acceptance criteria on one spectrum: `fail` outside `pass`, `look` outside the narrower `look` or where
 * the quantity could not be had, else `pass`. The worst criterion counts; null without criteria.
 */
export const verdictOf = (
  quantities: Readonly<Record<string, Measured>>,
  acceptance: Study['acceptance'],
): Verdict | null => {
  const each = Object.entries(acceptance).map(([name, { pass, look }]): Verdict => {
    const value = quantities[name]?.[0] ?? null
    if (value === null) return 'look'
    if (!inside(value, pass)) return 'fail'
    return look === null || inside(value, look) ? 'pass' : 'look'
  })
  if (each.length === 0) return null
  return each.includes('fail') ? 'fail' : each.includes('look') ? 'look' : 'pass'
}

const inside = (value: number, [low, high]: readonly [number, number]): boolean => value >= low && value <= high
