import type { ReadingHints } from './types.ts'

/** The line of YAML for an instrument's file that settles how its exports are read. */
export const settleYaml = (hints: ReadingHints): string => {
  const parts = [
    hints.x === undefined ? null : `x: ${hints.x}`,
    hints.medium === undefined ? null : `medium: ${hints.medium}`,
    hints.y === undefined ? null : `y: ${hints.y}`,
    hints.delimiter === undefined ? null : `delimiter: ${JSON.stringify(hints.delimiter)}`,
    hints.decimal === undefined ? null : `decimal: ${JSON.stringify(hints.decimal)}`,
  ]
  return `reading: { ${parts.filter((part) => part !== null).join(', ')} }`
}
