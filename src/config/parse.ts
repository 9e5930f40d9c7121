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
} as const satisfies Record<Kind, z.ZodType>

/** A part of the configuration that fits its schema, with the file it stands in (and where in it). */
export interface Part<T> {
  readonly value: T
  readonly document: YamlDocument
  readonly path: Path
}

/** All that could be read; a file with faults is missing here, but the names it claims are known. */
export interface Parts {
  readonly room: Part<RoomFile> | null
  readonly instruments: readonly Part<InstrumentFile>[]
  readonly species: readonly Part<SpeciesFile>[]
  readonly studies: readonly Part<StudyFile>[]
  readonly rules: readonly Part<RuleFile>[]
  readonly standards: readonly Part<StandardFile>[]
  /** Names in files that have faults of their own: nobody is told that these don't exist. */
  readonly clouded: Readonly<Record<Kind, readonly string[]>>
  readonly faults: readonly Fault[]
}

interface Parsed {
  readonly kind: 'parsed'
  readonly file: Kind
  readonly document: YamlDocument
  readonly value: unknown
}

interface Refused {
  readonly kind: 'refused'
  readonly file: Kind
  /** Null where the file is no YAML. */
  readonly document: YamlDocument | null
  readonly names: readonly string[]
  readonly faults: readonly Fault[]
}

/** Reads every file against its schema, and goes on past the ones that have faults. */
export const parseFiles = (files: readonly ConfigFile[]): Parts => {
  const all = files.map(parseFile)
  const parts = <T>(kind: Kind): readonly Part<T>[] =>
    all.flatMap((one) =>
      one.kind === 'parsed' && one.file === kind ? [{ value: one.value as T, document: one.document, path: [] }] : [],
    )
  const clouded = (kind: Kind) => all.flatMap((one) => (one.kind === 'refused' && one.file === kind ? one.names : []))
  return {
    room: parts<RoomFile>('room')[0] ?? null,
    instruments: parts('instruments'),
    species: parts('species'),
    studies: parts('studies'),
    rules: all.flatMap((one) => (one.file === 'rules' ? rulesOf(one) : [])),
    standards: parts('standards'),
    clouded: {
      room: [],
      instruments: clouded('instruments'),
      species: clouded('species'),
      studies: clouded('studies'),
      rules: clouded('rules'),
      standards: clouded('standards'),
    },
    faults: all.flatMap((one) => (one.kind === 'refused' ? one.faults : [])),
  }
}

/** Of a faulty file of rules, those that are right: what is wrong in their expressions is told at once too. */
const rulesOf = ({ document }: Parsed | Refused): readonly Part<RuleFile>[] => {
  const written = valueAt(document?.value, ['rules'])
  return (Array.isArray(written) ? written : []).flatMap((one: unknown, i) => {
    const outcome = ruleSchema.safeParse(one)
    return outcome.success && document !== null ? [{ value: outcome.data, document, path: ['rules', i] }] : []
  })
}

const parseFile = (file: ConfigFile): Parsed | Refused => {
  const { kind } = file
  const reading = readYaml(file.text, file.at)
  if (reading.kind === 'refused')
    return { kind: 'refused', file: kind, document: null, names: ['*'], faults: reading.faults }
  const { document } = reading
  const schema: z.ZodType = SCHEMAS[kind]
  const outcome = schema.safeParse(document.value)
  if (outcome.success) return { kind: 'parsed', file: kind, document, value: outcome.data }
  const faults = faultsOf(outcome.error.issues, document, schema)
  return { kind: 'refused', file: kind, document, names: namesIn(document.value, kind), faults }
}

const NAME_KEYS: Readonly<Record<Kind, string>> = {
  room: 'room',
  instruments: 'instrument',
  species: 'species',
  studies: 'study',
  rules: 'rule',
  standards: 'standard',
}

/** The names that a faulty file means to give; `*` where even that cannot be told. */
const namesIn = (value: unknown, kind: Kind): readonly string[] => {
  const entries = kind === 'rules' ? ((value as { rules?: unknown })?.rules ?? []) : [value]
  const names = (Array.isArray(entries) ? entries : []).map((entry: unknown) => {
    const found = (entry as Record<string, unknown> | null)?.[NAME_KEYS[kind]]
    return typeof found === 'string' && found !== '' ? found : '*'
  })
  return names.length > 0 ? names : ['*']
}
