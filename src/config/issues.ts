import type { z } from 'zod'
import type { Fault } from '../fault.ts'
import { suggestion } from '../rules/suggest.ts'
import type { Path, YamlDocument } from './yamlDocument.ts'

type Issue = z.core.$ZodIssue

/** Faults of one file, each at its line and column, in the order of the file. */
export const faultsOf = (issues: readonly Issue[], document: YamlDocument, schema: z.ZodType): readonly Fault[] =>
  issues.flatMap((issue) => faultsOfIssue(issue, [], document, schema)).sort(byPlace)

/** Orders faults by file, line and column. */
export const byPlace = (a: Fault, b: Fault): number =>
  a.place.at < b.place.at
    ? -1
    : a.place.at > b.place.at
      ? 1
      : (a.place.line ?? 0) - (b.place.line ?? 0) || (a.place.column ?? 0) - (b.place.column ?? 0)

const faultsOfIssue = (issue: Issue, above: Path, document: YamlDocument, schema: z.ZodType): readonly Fault[] => {
  const path = [...above, ...issue.path]
  if (issue.code === 'invalid_union') {
    const branch = likeliest(issue.errors, valueAt(document.value, path))
    return branch.flatMap((inner) => faultsOfIssue(inner, path, document, schema))
  }
  if (issue.code === 'unrecognized_keys') return issue.keys.map((key) => unknownKey(key, path, document, schema))
  const [what, remedy] = say(issue, path, document)
  const missing = !document.has(path)
  return [{ code: missing ? 'missing-key' : 'configuration', place: document.placeOf(path), what, remedy }]
}

/** The branch of a union that was meant: the one that a value of this make fits. */
const likeliest = (branches: readonly (readonly Issue[])[], value: unknown): readonly Issue[] => {
  const wrongMake = (issues: readonly Issue[]) =>
    issues.some(({ code, path }) => code === 'invalid_type' && path.length === 0)
  if (typeof value !== 'object' || value === null) return branches[0] ?? []
  return branches.find((issues) => !wrongMake(issues)) ?? branches[0] ?? []
}

const unknownKey = (key: string, path: Path, document: YamlDocument, schema: z.ZodType): Fault => {
  const known = keysAt(schema, path)
  const near = suggestion(key, known)
  return {
    code: 'unknown-key',
    place: document.placeOfKey(path, key),
    what: `unknown key "${key}"`,
    remedy: near === null ? `the keys known here are ${known.join(', ')}` : `did you mean "${near}"?`,
  }
}

const say = (issue: Issue, path: Path, document: YamlDocument): readonly [what: string, remedy: string] => {
  const key = sayKey(path)
  if (!document.has(path))
    return [`${key} is missing`, `add ${path.at(-1) === undefined ? 'it' : `\`${String(path.at(-1))}:\``}`]
  switch (issue.code) {
    case 'custom': {
      const remedy: unknown = issue.params?.remedy
      return [prefixed(key, issue.message), typeof remedy === 'string' ? remedy : 'mend it']
    }
    case 'invalid_type':
      if (key.endsWith('password') || key.endsWith('token'))
        return [
          `${key} ${sayMake(valueAt(document.value, path))}`,
          'say where it is kept: `{ credential: NAME }`, `{ env: NAME }` or `{ file: PATH }`',
        ]
      return [`${key} ${sayMake(valueAt(document.value, path))}`, `write ${sayExpected(issue.expected)} here`]
    case 'invalid_value': {
      const value = valueAt(document.value, path)
      const words = issue.values.map(String)
      if (typeof value !== 'string' || value === '')
        return [`${key} ${sayMake(value)}`, `write one of ${words.join(', ')}`]
      const near = suggestion(value, words)
      return [
        `${key}: "${value}" is none of ${words.join(', ')}`,
        near === null ? 'write one of them' : `did you mean ${near}?`,
      ]
    }
    case 'too_small':
      return issue.origin === 'array'
        ? [`${key} has too few entries`, `list at least ${issue.minimum}`]
        : [`${key} is too small`, `the least is ${issue.minimum}`]
    case 'too_big':
      return issue.origin === 'array'
        ? [`${key} has too many entries`, `list at most ${issue.maximum}`]
        : [`${key} is too large`, `the most is ${issue.maximum}`]
    default:
      return [`${key}: ${issue.message}`, 'mend it']
  }
}

const prefixed = (key: string, message: string): string =>
  message.startsWith('no ') ? `${key} has ${message}` : `${key}: ${message}`

/** `samples[0].name` */
const sayKey = (path: Path): string =>
  path.length === 0
    ? 'the file'
    : path.map((step, i) => (typeof step === 'number' ? `[${step}]` : `${i > 0 ? '.' : ''}${String(step)}`)).join('')

const sayMake = (value: unknown): string =>
  value === ''
    ? 'has no value'
    : Array.isArray(value)
      ? 'is a list'
      : typeof value === 'object'
        ? 'is a mapping'
        : 'is text'

const sayExpected = (expected: string): string =>
  expected === 'object' || expected === 'record'
    ? 'a mapping (`key: value`, indented or in braces)'
    : expected === 'array' || expected === 'tuple'
      ? 'a list (`- value`, or in brackets)'
      : 'a single value'

/** What stands at a path of plain data. */
export const valueAt = (value: unknown, path: Path): unknown =>
  path.reduce<unknown>(
    (inner, step) =>
      typeof inner === 'object' && inner !== null ? (inner as Record<PropertyKey, unknown>)[step] : undefined,
    value,
  )

/** The keys that a schema knows at a path. */
const keysAt = (schema: z.ZodType, path: Path): readonly string[] => {
  const inner = bare(schema)
  if (inner.some((one) => 'shape' in one.def)) {
    const shapes = inner.flatMap((one) => ('shape' in one.def ? [one.def.shape as Record<string, z.ZodType>] : []))
    if (path.length === 0) return shapes.flatMap((shape) => Object.keys(shape))
    const next = shapes.flatMap((shape) => shape[String(path[0])] ?? [])
    return next.flatMap((one) => keysAt(one, path.slice(1)))
  }
  return inner.flatMap((one) => {
    const def = one.def as { element?: z.ZodType; valueType?: z.ZodType }
    const next = def.element ?? def.valueType
    return next === undefined || path.length === 0 ? [] : keysAt(next, path.slice(1))
  })
}

/** Without optional, default and pipe; a union becomes its branches. */
const bare = (schema: z.ZodType): readonly z.ZodType[] => {
  const def = schema.def as { innerType?: z.ZodType; in?: z.ZodType; options?: readonly z.ZodType[] }
  if (def.innerType !== undefined) return bare(def.innerType)
  if (def.options !== undefined) return def.options.flatMap(bare)
  return [schema]
}
