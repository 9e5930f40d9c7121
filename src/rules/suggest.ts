/** The admitted word nearest to a misspelt one, or null when none is near enough to be what was meant. */
export const suggestion = (word: string, words: readonly string[]): string | null => {
  const lower = word.toLowerCase()
  const ranked = words
    .map((candidate) => ({ candidate, distance: distance(lower, candidate.toLowerCase()) }))
    .sort((a, b) => a.distance - b.distance)
  const best = ranked[0]
  const bound = Math.max(1, Math.floor(word.length / 3))
  return best !== undefined && best.distance <= bound + 0.5 ? best.candidate : null
}

/** Edit distance; the beginning of a longer word counts one edit, a different first letter half an edit more. */
const distance = (word: string, candidate: string): number =>
  word.length > 2 && candidate.startsWith(word)
    ? Math.min(1, editDistance(word, candidate))
    : editDistance(word, candidate) + (word[0] === candidate[0] ? 0 : 0.5)

/** Optimal string alignment: insertions, deletions, substitutions and swaps of neighbours count one each. */
const editDistance = (a: string, b: string): number => {
  let beforeLast: number[] = []
  let last = Array.from({ length: b.length + 1 }, (_, j) => j)
  for (let i = 1; i <= a.length; i++) {
    const row = [i]
    for (let j = 1; j <= b.length; j++) {
      const substituted = last[j - 1]! + (a[i - 1] === b[j - 1] ? 0 : 1)
      const swapped =
        i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1] ? beforeLast[j - 2]! + 1 : Infinity
      row.push(Math.min(last[j]! + 1, row[j - 1]! + 1, substituted, swapped))
    }
    beforeLast = last
    last = row
  }
  return last[b.length]!
}
