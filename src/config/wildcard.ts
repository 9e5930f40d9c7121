/**
 * Names with wildcards: `*` stands for any run of characters, also none, `?` for exactly one. Two patterns meet when some
 * name fits both; that is decided exactly, position by position, in time |a|·|b|. A match is the case where one of
 * the two is a plain name.
 */

const ANY_RUN = Symbol('*')
const ANY_ONE = Symbol('?')
type Mark = string | typeof ANY_RUN | typeof ANY_ONE

const marksOf = (pattern: string): readonly Mark[] =>
  [...pattern].map((c) => (c === '*' ? ANY_RUN : c === '?' ? ANY_ONE : c))

/** Whether the name holds a wildcard. */
export const hasWildcard = (name: string): boolean => /[*?]/.test(name)

/** Whether a name fits a pattern, the whole of it, case included. */
export const fits = (pattern: string, name: string): boolean => meet(marksOf(pattern), [...name]) !== null

/** A name that both patterns take; null where there is none. */
export const commonName = (a: string, b: string): string | null => meet(marksOf(a), marksOf(b))

/** Shortest common name of the rests a[i…] and b[j…], filled from the ends. */
const meet = (a: readonly Mark[], b: readonly Mark[]): string | null => {
  let below: (string | null)[] = []
  for (let i = a.length; i >= 0; i--) {
    const row: (string | null)[] = new Array(b.length + 1).fill(null)
    for (let j = b.length; j >= 0; j--) row[j] = rest(a[i], b[j], below, row, j)
    below = row
  }
  return below[0] ?? null
}

const rest = (
  x: Mark | undefined,
  y: Mark | undefined,
  below: readonly (string | null)[],
  row: readonly (string | null)[],
  j: number,
): string | null => {
  if (x === undefined && y === undefined) return ''
  const ways: (string | null)[] = []
  // a run may end here, or swallow what the other side has next
  if (x === ANY_RUN) ways.push(below[j] ?? null)
  if (y === ANY_RUN) ways.push(row[j + 1] ?? null)
  if (x === ANY_RUN && y !== undefined && y !== ANY_RUN) ways.push(before(letter(y), row[j + 1]))
  if (y === ANY_RUN && x !== undefined && x !== ANY_RUN) ways.push(before(letter(x), below[j]))
  if (x !== undefined && y !== undefined && x !== ANY_RUN && y !== ANY_RUN) {
    const agreed = x === ANY_ONE ? letter(y) : y === ANY_ONE || x === y ? letter(x) : null
    if (agreed !== null) ways.push(before(agreed, below[j + 1]))
  }
  return ways.reduce((best, way) => (way !== null && (best === null || way.length < best.length) ? way : best), null)
}

const letter = (mark: Mark): string => (typeof mark === 'string' ? mark : 'x')

const before = (c: string, following: string | null | undefined): string | null =>
  following === null || following === undefined ? null : c + following
