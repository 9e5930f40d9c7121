import type { ReadingHints } from './types.ts'

const WORDS: Readonly<Record<string, string>> = { '\t': 'tab', ' ': 'space' }

/** The line of YAML for an instrument's file that settles how its exports are read. */
export const settleYaml = (hints: ReadingHints): string => {
  const parts = [
    hints.x === undefined ? null : `x: ${hints.x}`,
    hints.medium === undefined ? null : `medium: ${hints.medium}`,
    hints.y === undefined ? null : `y: ${hints.y}`,
    hints.delimiter === undefined ? null : `delimiter: ${WORDS[hints.delimiter] ?? JSON.stringify(hints.delimiter)}`,
    hints.decimal === undefined ? null : `decimal: ${JSON.stringify(hints.decimal)}`,
    hints.layout === undefined ? null : `layout: ${hints.layout}`,
  ]
  return `reading: { ${parts.filter((part) => part !== null).join(', ')} }`
}
