/** Names come from files: control characters and bidirectional overrides would play with the terminal. */
export const printable = (text: string): string =>
  text.replace(/[\p{Cc}\p{Cf}\u2028\u2029]/gu, (c) => `\\u{${c.codePointAt(0)!.toString(16)}}`)
