import type { Occasion, Window } from '../series/types.ts'
import type { CompiledRule } from './types.ts'

/**
 * The values of one quantity, below and above the reference, at which a rule begins to ring if everything else stays as it
 * is on the newest occasion. Found by asking the rule: steps out from the reference, doubled until it rings, then
 * bisection. Null on a side on which it does not ring within half the reference; both null where the rule is no
 * expression, rings at the reference itself, or nothing is known.
 */
export const limitsOf = (
  rule: CompiledRule,
  window: Window,
  quantity: string,
): { readonly below: number | null; readonly above: number | null } => {
  const none = { below: null, above: null }
  const newest = window.occasions.at(-1)
  const centre = window.reference.kind === 'ready' ? (window.reference.values[quantity] ?? null) : null
  const isAsked = rule.definition.condition.kind === 'expression' && rule.quantities.includes(quantity)
  if (newest === undefined || centre === null || centre === 0 || !isAsked) return none
  const rings = (value: number): boolean => {
    const occasion: Occasion = { ...newest, values: { ...newest.values, [quantity]: value } }
    return rule.judge({ ...window, occasions: [...window.occasions.slice(0, -1), occasion] }).outcome.kind === 'rings'
  }
  if (rings(centre)) return none
  return { below: edge(rings, centre, -1), above: edge(rings, centre, 1) }
}

const BISECTIONS = 40

const edge = (rings: (value: number) => boolean, centre: number, sign: 1 | -1): number | null => {
  const reach = Math.abs(centre) / 2
  let outside = reach * 2 ** -20
  while (outside <= reach && !rings(centre + sign * outside)) outside *= 2
  if (outside > reach) return null
  let inside = outside / 2
  for (let i = 0; i < BISECTIONS; i++) {
    const middle = (inside + outside) / 2
    if (rings(centre + sign * middle)) outside = middle
    else inside = middle
  }
  return centre + sign * outside
}
