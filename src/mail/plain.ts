/**
 * Names of samples, files and rules come from outside. Before they stand in a letter they become one line without
 * control characters (which could open a new header), without the marks that reverse or hide text, and of bounded length.
 */
const UNPRINTABLE = /[\p{Cc}\p{Cf}\p{Co}\p{Cn}\p{Zl}\p{Zp}\ud800-\udfff]+/gu

/** One printable line of at most `limit` characters; what was cut is shown by an ellipsis. */
export const oneLine = (text: string, limit = 400): string => {
  const line = text.replace(UNPRINTABLE, ' ').replace(/\s+/gu, ' ').trim()
  const characters = [...line]
  return characters.length <= limit ? line : `${characters.slice(0, limit - 1).join('')}…`
}

const ENTITIES: Readonly<Record<string, string>> = {
  '&': '&amp;',
  '<': '&lt;',
  '>': '&gt;',
  '"': '&quot;',
  "'": '&#39;',
}

/** Text as HTML shows it, in element content and in quoted attributes. */
export const escapeHtml = (text: string): string => text.replace(/[&<>"']/g, (character) => ENTITIES[character]!)
