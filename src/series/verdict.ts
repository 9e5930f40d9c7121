/** Bounds of a study's acceptance criteria in the quantity's own unit; `look` is the narrower range. */
export interface Acceptance {
  readonly pass: readonly [number, number]
  readonly look: readonly [number, number] | null
}

/**
 * Verdict on one spectrum: `fail` when a quantity is outside its pass range, `look` when one is outside its look range,
 * `pass` when all are inside; null without criteria, or when a quantity that is asked for is lacking and none fails.
 */
export const verdictOf = (
  quantities: Readonly<Record<string, readonly [value: number | null, u: number | null]>>,
  acceptance: Readonly<Record<string, Acceptance>>,
): 'pass' | 'look' | 'fail' | null => {
  const verdicts = Object.entries(acceptance).map(([name, { pass, look }]) => {
    const value = quantities[name]?.[0] ?? null
    if (value === null) return null
    return !inside(value, pass) ? 'fail' : look !== null && !inside(value, look) ? 'look' : 'pass'
  })
  if (verdicts.includes('fail')) return 'fail'
  if (verdicts.length === 0 || verdicts.includes(null)) return null
  return verdicts.includes('look') ? 'look' : 'pass'
}

const inside = (x: number, [low, high]: readonly [number, number]): boolean => x >= low && x <= high
