import { axisWords, ordinateWords, plainWords } from './words.ts'

/** The name of a sample in the heading of its column: what is left when the words for its quantity are taken out; null if nothing is. */
export const sampleOfLabel = (label: string, oneOfMany: boolean): string | null => {
  const words = ordinateWords(label)
  if (label === '' || words.kind === 'other' || words.kind === 'side') return null
  if (words.kind === 'none')
    return /^(?:y|[a-z]{1,2}\.?u\.?|value|wert|valeur|valor)$/.test(plainWords(label)) ? null : label
  if (!oneOfMany) return null
  const parts = label
    .replace(/\s*[([][^)\]]*[)\]]/g, ' ')
    .split(/[\s:;,/]+/)
    .filter(
      (part) =>
        part !== '' && part !== '%' && ordinateWords(part).kind !== 'known' && axisWords(part).units.length === 0,
    )
  const name = parts.join(' ').trim()
  return /\p{L}/u.test(name) ? name : null
}
