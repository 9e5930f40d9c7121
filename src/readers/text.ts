/** Bytes to text, and text to lines that know their number. */

export type Decoded =
  | {
      readonly kind: 'text'
      readonly text: string
      readonly encoding: 'UTF-8' | 'UTF-16LE' | 'UTF-16BE' | 'Windows-1252'
    }
  | { readonly kind: 'binary'; readonly why: string }

export interface Line {
  /** From 1. */
  readonly number: number
  readonly text: string
}

const decode = (bytes: Uint8Array, label: string): string | null => {
  try {
    return new TextDecoder(label, { fatal: true }).decode(bytes)
  } catch {
    return null
  }
}

/** Every second byte of Western text in UTF-16 is zero: which half tells the byte order, where no mark does. */
const byteOrder = (bytes: Uint8Array): 'utf-16le' | 'utf-16be' | null => {
  const pairs = Math.min(bytes.length, 400) >> 1
  if (pairs < 4 || bytes.length % 2 === 1) return null
  let even = 0
  let odd = 0
  for (let i = 0; i < pairs; i++) {
    if (bytes[2 * i] === 0) even++
    if (bytes[2 * i + 1] === 0) odd++
  }
  if (odd > 0.8 * pairs && even < 0.05 * pairs) return 'utf-16le'
  return even > 0.8 * pairs && odd < 0.05 * pairs ? 'utf-16be' : null
}

const END_MARK = 0x1a
/** Control characters other than tab, line ends, vertical tab and form feed. */
// biome-ignore lint/suspicious/noControlCharactersInRegex: they are what is looked for
const CONTROL = /[\x00-\x08\x0e-\x1f\x7f]/

/**
 * Text of a file in UTF-8, UTF-16 (with or without a mark) or, where it is neither, Windows-1252, of which Latin-1 is a part.
 * `binary` where control characters show that it is no text.
 */
export const decodeText = (bytes: Uint8Array): Decoded => {
  const known = decoded.get(bytes)
  if (known !== undefined) return known
  const fresh = decodedAnew(bytes)
  decoded.set(bytes, fresh)
  return fresh
}

/** Every reader that is asked whether a file is its own decodes it: once is enough. A file's bytes are never written over. */
const decoded = new WeakMap<Uint8Array, Decoded>()

const decodedAnew = (bytes: Uint8Array): Decoded => {
  const marked =
    bytes[0] === 0xff && bytes[1] === 0xfe ? 'utf-16le' : bytes[0] === 0xfe && bytes[1] === 0xff ? 'utf-16be' : null
  const wide = marked ?? byteOrder(bytes)
  const utf8 = wide === null ? decode(bytes, 'utf-8') : null
  const text = wide !== null ? decode(bytes, wide) : (utf8 ?? decode(bytes, 'windows-1252'))
  if (text === null) return { kind: 'binary', why: 'its bytes are no text in UTF-16, though it says so' }
  const encoding =
    wide === 'utf-16le' ? 'UTF-16LE' : wide === 'utf-16be' ? 'UTF-16BE' : utf8 !== null ? 'UTF-8' : 'Windows-1252'
  // the end mark of old systems (0x1A) may close a file
  const end = text.trimEnd()
  const body = end.charCodeAt(end.length - 1) === END_MARK ? end.slice(0, -1) : text
  const control = body.search(CONTROL)
  if (control >= 0) return { kind: 'binary', why: `a control character stands at position ${control + 1}` }
  return { kind: 'text', text: body, encoding }
}

/** Lines ended by CR, LF or CRLF, mixtures included; form feeds count as blanks. */
export const linesOf = (text: string): readonly Line[] =>
  text
    .replace(/[\f\v]/g, ' ')
    .split(text.includes('\r') ? /\r\n|\n|\r/ : '\n')
    .map((line, i) => ({ number: i + 1, text: line }))
