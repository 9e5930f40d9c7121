import {
  type Alias,
  isAlias,
  isMap,
  isScalar,
  isSeq,
  LineCounter,
  type Node,
  type Pair,
  parseDocument,
  type Scalar,
} from 'yaml'
import type { Fault, Place } from '../fault.ts'

export type Path = readonly PropertyKey[]

/** One configuration file as plain data, and where each part of it stands. */
export interface YamlDocument {
  readonly at: string
  /** Mappings, lists and text only: what is a number or a time is the schema's business. */
  readonly value: unknown
  /** Place of the value at a path; of its nearest ancestor where the path leads nowhere. */
  placeOf(path: Path): Place
  /** Place of a key of the mapping at a path. */
  placeOfKey(path: Path, key: string): Place
  /** Place of the first character of a scalar's text, inside its quotes or its block. */
  placeOfText(path: Path): Place
  /** Whether something stands at the path. */
  has(path: Path): boolean
}

export type YamlReading =
  | { readonly kind: 'read'; readonly document: YamlDocument }
  | { readonly kind: 'refused'; readonly faults: readonly [Fault, ...Fault[]] }

/** Parts that a file may hold, aliases counted as often as they stand for something. */
const MOST_PARTS = 50_000

/**
 * Reads one YAML 1.2 document. Every scalar stays text (the failsafe schema), so that a sample named `0012` or `1e5` keeps
 * its name; whatever the parser would only warn of is refused; merge keys are off.
 */
export const readYaml = (text: string, at: string): YamlReading => {
  const lines = new LineCounter()
  const document = parseDocument(text, {
    schema: 'failsafe',
    version: '1.2',
    merge: false,
    prettyErrors: false,
    lineCounter: lines,
  })
  const placeAt = (offset: number): Place => {
    const { line, col } = lines.linePos(offset)
    return { at, line: Math.max(1, line), column: Math.max(1, col) }
  }
  const troubles = [...document.errors, ...document.warnings].map(({ code, message, pos }): Fault => {
    const [what, remedy] = sayTrouble(code, message)
    return { code: 'yaml', place: placeAt(pos[0]), what, remedy }
  })
  const root = document.contents as Node | null
  if (troubles.length === 0 && root === null)
    troubles.push({
      code: 'empty-file',
      place: { at, line: 1, column: 1 },
      what: 'the file is empty, or holds comments only',
      remedy: 'fill it in (`tendq init` writes an example) or delete it',
    })
  if (root === null || troubles.length > 0) return { kind: 'refused', faults: troubles as [Fault, ...Fault[]] }

  const walked = toPlain(root, (alias) => alias.resolve(document) as Node | undefined)
  if (walked.kind === 'refused') {
    const { node, what, remedy } = walked
    return { kind: 'refused', faults: [{ code: 'yaml', place: placeAt(startOf(node)), what, remedy }] }
  }
  const resolve = (node: Node | null | undefined): Node | null =>
    isAlias(node) ? ((node.resolve(document) as Node | undefined) ?? null) : (node ?? null)
  const walk = (path: Path): { node: Node; whole: boolean } => {
    let node: Node = root
    for (const step of path) {
      const next = stepInto(resolve(node), step)
      if (next === null) return { node, whole: false }
      node = next
    }
    return { node, whole: true }
  }
  return {
    kind: 'read',
    document: {
      at,
      value: walked.value,
      placeOf: (path) => placeAt(startOf(walk(path).node)),
      placeOfKey: (path, key) => {
        const { node } = walk(path)
        const key_ = pairOf(resolve(node), key)?.key
        return placeAt(startOf(key_ ?? node))
      },
      placeOfText: (path) => {
        const node = resolve(walk(path).node)
        return placeAt(isScalar(node) ? textStart(node, text) : startOf(node ?? root))
      },
      has: (path) => walk(path).whole,
    },
  }
}

const startOf = (node: Node): number => node.range?.[0] ?? 0

const pairOf = (node: Node | null, key: PropertyKey): Pair<Node, Node | null> | undefined =>
  isMap<Node, Node | null>(node)
    ? node.items.find((pair) => isScalar(pair.key) && pair.key.value === String(key))
    : undefined

const stepInto = (node: Node | null, step: PropertyKey): Node | null => {
  if (isSeq<Node>(node)) return node.items[Number(step)] ?? null
  return pairOf(node, step)?.value ?? null
}

/** A quoted scalar's text starts behind its quote, a block scalar's at the first mark of its first filled line. */
const textStart = (scalar: Scalar, text: string): number => {
  const start = startOf(scalar)
  if (scalar.type === 'QUOTE_DOUBLE' || scalar.type === 'QUOTE_SINGLE') return start + 1
  if (scalar.type !== 'BLOCK_FOLDED' && scalar.type !== 'BLOCK_LITERAL') return start
  const header = text.indexOf('\n', start)
  const ahead = /^\s*/.exec(text.slice(header + 1))?.[0].length ?? 0
  return header < 0 ? start : header + 1 + ahead
}

type Walked =
  | { readonly kind: 'plain'; readonly value: unknown }
  | { readonly kind: 'refused'; readonly node: Node; readonly what: string; readonly remedy: string }

const toPlain = (root: Node, target: (alias: Alias) => Node | undefined): Walked => {
  let parts = 0
  const refuse = (node: Node, what: string, remedy: string): Walked => ({ kind: 'refused', node, what, remedy })
  const walk = (node: Node, above: readonly Node[]): Walked => {
    parts += 1
    if (parts > MOST_PARTS) return refuse(node, 'the file stands for too many values', 'split it')
    if (isAlias(node)) {
      const meant = target(node)
      if (meant === undefined) return refuse(node, `*${node.source} has no anchor`, `set &${node.source} before it`)
      if (above.includes(meant)) return refuse(node, `*${node.source} holds itself`, 'write the value out')
      return walk(meant, above)
    }
    if (isSeq<Node>(node)) return walkList(node.items, [...above, node])
    if (isMap<Node, Node | null>(node)) return walkMap(node.items, [...above, node])
    return { kind: 'plain', value: isScalar(node) ? String(node.value ?? '') : '' }
  }
  const walkList = (items: readonly Node[], above: readonly Node[]): Walked => {
    const values: unknown[] = []
    for (const item of items) {
      const one = walk(item, above)
      if (one.kind === 'refused') return one
      values.push(one.value)
    }
    return { kind: 'plain', value: values }
  }
  const walkMap = (pairs: readonly Pair<Node, Node | null>[], above: readonly Node[]): Walked => {
    const values: [string, unknown][] = []
    for (const { key, value } of pairs) {
      if (!isScalar(key)) return refuse(key, 'a key must be a word', 'write `key: value`')
      const one: Walked = value === null ? { kind: 'plain', value: '' } : walk(value, above)
      if (one.kind === 'refused') return one
      values.push([String(key.value), one.value])
    }
    return { kind: 'plain', value: Object.fromEntries(values) }
  }
  return walk(root, [])
}

/** The parser's own words, with what to do for the mistakes that people make most. */
const sayTrouble = (code: string, message: string): readonly [what: string, remedy: string] => {
  const first = (message.split('\n')[0] ?? message).replace(/[.;]+$/, '')
  switch (code) {
    case 'DUPLICATE_KEY':
      return ['this key stands twice in one mapping', 'keep one of them']
    case 'TAB_AS_INDENT':
      return ['a tab indents this line', 'indent with spaces: YAML allows no tabs there']
    case 'MULTIPLE_DOCS':
      return ['a second document begins here', 'keep one document a file; put the other into a file of its own']
    case 'TAG_RESOLVE_FAILED':
      return [first, 'leave the tag out: what a value is follows from its key']
    case 'BAD_ALIAS':
      return [first, 'quote a text that begins with * or &']
    default:
      return [first, 'mend the YAML here; quote a text that holds : # * & { } [ ] or begins with a mark']
  }
}
