import { animl } from './animl.ts'
import { delimitedText } from './delimited.ts'
import { jcampDx } from './jcamp.ts'
import type { Reader, Reading, ReadingHints } from './types.ts'

export { settleYaml } from './settle.ts'
export { type Decoded, decodeText } from './text.ts'

/** Every format that is read. A new one is a file of its own and one entry here. */
export const READERS: readonly Reader[] = [jcampDx, animl, delimitedText]

/** Less than this is no claim. */
const CLAIM = 0.3

/** How sure each reader is that the bytes are its own, surest first. */
export const confidences = (bytes: Uint8Array): readonly { readonly reader: Reader; readonly confidence: number }[] =>
  READERS.map((reader) => ({ reader, confidence: reader.confidence(bytes) })).sort(
    (a, b) => b.confidence - a.confidence,
  )

/** Reads the spectra of a file with the reader that is surest of it; refuses where none is, or two are alike. */
export const readSpectra = (bytes: Uint8Array, file: string, hints: ReadingHints): Reading => {
  const [first, second] = confidences(bytes)
  const refused = (code: string, what: string, remedy: string): Reading => ({
    kind: 'refused',
    format: null,
    faults: [{ code, place: { at: file }, what, remedy }],
    settle: [],
    spectra: [],
  })
  if (bytes.length === 0) return refused('empty', 'the file is empty', 'wait until it is written, or export it again')
  if (!first || first.confidence < CLAIM) {
    return refused(
      'unknown-format',
      'this is no format that is read here',
      `export it as ${READERS.map((reader) => reader.format).join(' or ')}`,
    )
  }
  if (second && second.confidence === first.confidence) {
    return refused(
      'two-formats',
      `this may be ${first.reader.format} or ${second.reader.format}`,
      'export it in one of them',
    )
  }
  return first.reader.read(bytes, file, hints)
}
