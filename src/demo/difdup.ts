/**
 * The compressed ordinates of JCAMP-DX 4.24 (McDonald and Wilks, Applied Spectroscopy 42 (1988) 151), as instruments
 * write them: each line starts with its abscissa and a whole ordinate (SQZ), then differences (DIF), equal neighbours
 * counted (DUP). After the first, a line's first ordinate repeats the last one of the line before, as a check.
 */
const SQUEEZED = ['@ABCDEFGHI', '@abcdefghi'] as const
const DIFFERENCE = ['%JKLMNOPQR', '%jklmnopqr'] as const
const DUPLICATE = '_STUVWXYZs'

const coded = ([positive, negative]: readonly [string, string], value: number): string => {
  const digits = String(Math.abs(value))
  return `${(value < 0 ? negative : positive)[Number(digits[0])]!}${digits.slice(1)}`
}

const duplicates = (count: number): string => {
  const digits = String(count)
  return count < 2 ? '' : `${DUPLICATE[Number(digits[0])]!}${digits.slice(1)}`
}

/** Longest line the standard allows. */
const COLUMNS = 80

/** Lines of `(X++(Y..Y))` for whole ordinates; `xOf(i)` writes the abscissa of point i. */
export const difdupLines = (ordinates: readonly number[], xOf: (point: number) => string): readonly string[] => {
  const lines: string[] = []
  let point = 0
  while (point < ordinates.length - 1) {
    let line = `${xOf(point)}${coded(SQUEEZED, ordinates[point]!)}`
    for (;;) {
      const step = ordinates[point + 1]! - ordinates[point]!
      let count = 1
      while (point + count + 1 < ordinates.length && ordinates[point + count + 1]! - ordinates[point + count]! === step)
        count += 1
      const piece = `${coded(DIFFERENCE, step)}${duplicates(count)}`
      if (line.length + piece.length > COLUMNS) break
      line += piece
      point += count
      if (point >= ordinates.length - 1) break
    }
    lines.push(line)
  }
  return [...lines, `${xOf(ordinates.length - 1)}${coded(SQUEEZED, ordinates.at(-1)!)}`]
}
