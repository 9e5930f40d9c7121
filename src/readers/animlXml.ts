/**
 * XML as far as AnIML needs it: elements of one namespace with their attributes, text and place. Nothing is fetched and nothing
 * expanded: a document type declaration, through which entities come, is refused, and so is what is too large or too deep.
 */
import { SaxesParser } from 'saxes'

export interface Element {
  readonly name: string
  readonly attributes: Readonly<Record<string, string>>
  readonly children: readonly Element[]
  /** Text of an element without children; empty where there are children. */
  readonly text: string
  /** Where its `<` stands, in UTF-16 units from the start of the text. */
  readonly offset: number
}

/** One thing that is wrong, at an offset of the text; `settle` says which hints would make it readable. */
export interface Flaw<Settle = never> {
  readonly kind: 'flaw'
  readonly code: string
  readonly offset: number
  readonly what: string
  readonly remedy: string
  readonly settle?: readonly Settle[]
}

export type ParsedXml =
  | {
      readonly kind: 'document'
      readonly root: Element
      /** Namespace of the root; only its elements are kept. */
      readonly namespace: string
    }
  | Flaw

const LARGEST_TEXT = 32 * 1024 * 1024
const LONGEST_ATTRIBUTE = 65_536
const MOST_ATTRIBUTES = 1000
const MOST_ELEMENTS = 250_000
const DEEPEST = 100

/** Parts that hold no measured values; signatures and embedded documents may be large. */
const SKIPPED = new Set(['AuditTrailEntrySet', 'SignatureSet', 'TagSet', 'Template', 'PNG', 'SVG', 'EmbeddedXML'])

type Growing = { -readonly [K in keyof Element]: Element[K] } & { children: Element[] }

/** Carries the first flaw out of the parser, which has no other way to stop. */
class Stop extends Error {
  readonly flaw: Flaw
  constructor(flaw: Flaw) {
    super(flaw.what)
    this.flaw = flaw
  }
}

/** The document, or the first thing wrong with it as XML. */
export const parseXml = (text: string): ParsedXml => {
  if (text.length > LARGEST_TEXT)
    return tooLarge(0, `it has ${text.length} characters, more than ${LARGEST_TEXT} are not read`)
  try {
    return parsed(text)
  } catch (error) {
    if (error instanceof Stop) return error.flaw
    throw error
  }
}

const tooLarge = (offset: number, what: string): Flaw => ({
  kind: 'flaw',
  code: 'too-large',
  offset,
  what,
  remedy: 'export fewer spectra to a file',
})

const parsed = (text: string): ParsedXml => {
  const parser = new SaxesParser({ xmlns: true })
  const open: Growing[] = []
  let root: Growing | null = null
  let namespace = ''
  let [start, depth, skippedFrom, elements, attributesHere, closing] = [0, 0, Infinity, 0, 0, false]
  const stop = (code: string, offset: number, what: string, remedy: string): never => {
    throw new Stop({ kind: 'flaw', code, offset, what, remedy })
  }

  parser.on('error', (error) => {
    const what = error.message.replace(/^(?:[^:]*:)?\d+:\d+: /, '').replace(/\.$/, '')
    const offset = Math.max(0, Math.min(text.length, parser.position) - 1)
    if (closing)
      stop('cut-short', offset, `the document ends too early: ${what}`, 'copy the file again when it is complete')
    stop('bad-xml', offset, `this is no well-formed XML: ${what}`, 'export the file again')
  })
  parser.on('doctype', () =>
    stop(
      'doctype',
      Math.max(0, text.lastIndexOf('<!DOCTYPE', parser.position)),
      'it has a document type declaration, which AnIML does not use and through which other files could be drawn in',
      'export it without one',
    ),
  )
  parser.on('opentagstart', (tag) => {
    start = text.lastIndexOf('<', parser.position - tag.name.length - 1)
    attributesHere = 0
    if (++depth > DEEPEST)
      stop('too-deep', start, `elements stand ${depth} deep in one another`, 'export the file again')
    if (++elements > MOST_ELEMENTS) throw new Stop(tooLarge(start, `it has more than ${MOST_ELEMENTS} elements`))
  })
  parser.on('attribute', ({ name, value }) => {
    if (++attributesHere > MOST_ATTRIBUTES)
      throw new Stop(tooLarge(start, `an element has more than ${MOST_ATTRIBUTES} attributes`))
    if (value.length > LONGEST_ATTRIBUTE)
      throw new Stop(tooLarge(start, `the attribute ${name} has ${value.length} characters`))
  })
  parser.on('opentag', (tag) => {
    if (root === null) namespace = tag.uri
    if (depth > skippedFrom) return
    if (tag.uri !== namespace || SKIPPED.has(tag.local)) {
      skippedFrom = depth
      return
    }
    const attributes: Record<string, string> = Object.create(null)
    for (const { prefix, local, value } of Object.values(tag.attributes)) if (prefix === '') attributes[local] = value
    const element: Growing = { name: tag.local, attributes, children: [], text: '', offset: start }
    root ??= element
    open.at(-1)?.children.push(element)
    open.push(element)
  })
  const addText = (piece: string) => {
    const last = open.at(-1)
    if (last && depth < skippedFrom) last.text += piece
  }
  parser.on('text', addText)
  parser.on('cdata', addText)
  parser.on('closetag', () => {
    if (depth < skippedFrom) {
      const element = open.pop()
      if (element && element.children.length > 0) element.text = ''
    } else if (depth === skippedFrom) skippedFrom = Infinity
    depth--
  })

  parser.write(text)
  closing = true
  parser.close()
  if (root === null) return stop('bad-xml', 0, 'there is no element in it', 'export the file again')
  return { kind: 'document', root, namespace }
}

/** Children of one name. */
export const childrenOf = (element: Element, name: string): readonly Element[] =>
  element.children.filter((child) => child.name === name)

/** The first child of a name, or null. */
export const childOf = (element: Element, name: string): Element | null =>
  element.children.find((child) => child.name === name) ?? null

/** Line and column, both from 1, of an offset. CR, LF and CRLF end lines. */
export const placesOf = (text: string): ((offset: number) => { readonly line: number; readonly column: number }) => {
  let starts: number[] | null = null
  return (offset) => {
    starts ??= [0, ...Array.from(text.matchAll(/\r\n|\n|\r/g), (m) => m.index + m[0].length)]
    let [low, high] = [0, starts.length - 1]
    while (low < high) {
      const middle = (low + high + 1) >> 1
      if (starts[middle]! <= offset) low = middle
      else high = middle - 1
    }
    return { line: low + 1, column: offset - starts[low]! + 1 }
  }
}
