import type { z } from 'zod'
import type { Fault } from '../fault.ts'
import type { ConfigFile, Kind } from './files.ts'
import { faultsOf, valueAt } from './issues.ts'
import { type InstrumentFile, instrumentSchema } from './schemas/instrument.ts'
import { type RoomFile, roomSchema } from './schemas/room.ts'
import { type RuleFile, ruleSchema, rulesSchema } from './schemas/rules.ts'
import { type SpeciesFile, speciesSchema } from './schemas/species.ts'
import { type StandardFile, standardSchema } from './schemas/standard.ts'
import { type StudyFile, studySchema } from './schemas/study.ts'
import { type Path, readYaml, type YamlDocument } from './yamlDocument.ts'

/** The schema of every kind of file; what is published for editors is made of the same. */
export const SCHEMAS = {
  room: roomSchema,
  instruments: instrumentSchema,
  species: speciesSchema,
  studies: studySchema,
  rules: rulesSchema,
  standards: standardSchema,
} as const satisfies Record<Kind, z.ZodObject>

/** A part of the configuration that fits its schema, with the file it stands in (and where in it). */
export interface Part<T> {
  readonly value: T
  readonly document: YamlDocument
  readonly path: Path
}

/** Of a file with faults, the keys that have none: what is wrong elsewhere with these is told at once too. */
export interface FilePart<T> extends Part<Partial<T>> {
  /** Keys that have faults, or are missing. */
  readonly damaged: readonly string[]
}

/** All that could be read. Where there is no fault, every part is whole. */
export interface Parts {
  readonly room: FilePart<RoomFile> | null
  readonly instruments: readonly FilePart<InstrumentFile>[]
  readonly species: readonly FilePart<SpeciesFile>[]
  readonly studies: readonly FilePart<StudyFile>[]
  readonly rules: readonly Part<RuleFile>[]
  readonly standards: readonly FilePart<StandardFile>[]
  /** Kinds with a file whose name cannot be told: of these, nobody is told that a name does not exist. */
  readonly clouded: ReadonlySet<Kind>
  readonly faults: readonly Fault[]
}

interface ParsedFile {
  readonly kind: Kind
  /** Null where the file is no YAML. */
  readonly part: FilePart<unknown> | null
  readonly faults: readonly Fault[]
}

/** Reads every file against its schema, and goes on past the ones that have faults. */
export const parseFiles = (files: readonly ConfigFile[]): Parts => {
  const all = files.map(parseFile)
  const parts = <T>(kind: Kind) =>
    all.flatMap((one) => (one.kind === kind && one.part !== null ? [one.part as FilePart<T>] : []))
  return {
    room: parts<RoomFile>('room')[0] ?? null,
    instruments: parts('instruments'),
    species: parts('species'),
    studies: parts('studies'),
    rules: parts('rules').flatMap(rulesOf),
    standards: parts('standards'),
    clouded: new Set(
      all.filter(({ part, kind }) => part === null || part.damaged.includes(NAME_KEYS[kind])).map(({ kind }) => kind),
    ),
    faults: all.flatMap((one) => one.faults),
  }
}

/** Of a file of rules, those that are right. */
const rulesOf = ({ document }: Part<unknown>): readonly Part<RuleFile>[] => {
  const written = valueAt(document.value, ['rules'])
  return (Array.isArray(written) ? written : []).flatMap((one: unknown, i) => {
    const outcome = ruleSchema.safeParse(one)
    return outcome.success ? [{ value: outcome.data, document, path: ['rules', i] }] : []
  })
}

const parseFile = ({ kind, text, at }: ConfigFile): ParsedFile => {
  const reading = readYaml(text, at)
  if (reading.kind === 'refused') return { kind, part: null, faults: reading.faults }
  const { document } = reading
  const schema: z.ZodObject = SCHEMAS[kind]
  const outcome = schema.safeParse(document.value)
  if (outcome.success) return { kind, part: { value: outcome.data, document, path: [], damaged: [] }, faults: [] }
  const { issues } = outcome.error
  return { kind, part: undamaged(schema, document, issues), faults: faultsOf(issues, document, schema) }
}

/** The keys of a faulty file that are right by themselves. Null where the file is no mapping. */
const undamaged = (
  schema: z.ZodObject,
  document: YamlDocument,
  issues: readonly z.core.$ZodIssue[],
): FilePart<unknown> | null => {
  const { value } = document
  if (typeof value !== 'object' || value === null || Array.isArray(value)) return null
  const damaged = issues.flatMap(({ path }) => (path.length === 0 ? [] : [String(path[0])]))
  const right = Object.entries(value).filter(([key]) => key in schema.shape && !damaged.includes(key))
  const outcome = schema.partial().safeParse(Object.fromEntries(right))
  return outcome.success ? { value: outcome.data, document, path: [], damaged } : null
}

const NAME_KEYS: Readonly<Record<Kind, string>> = {
  room: 'room',
  instruments: 'instrument',
  species: 'species',
  studies: 'study',
  rules: 'rules',
  standards: 'standard',
}
