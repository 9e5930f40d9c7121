import { z } from 'zod'
import type { Kind } from './files.ts'
import { SCHEMAS } from './parse.ts'

/** Files that a published schema is for, as people write them. */
const FILES: Readonly<Record<Kind, string>> = {
  room: 'tendq.yaml',
  instruments: 'instruments/*.yaml',
  species: 'species/*.yaml',
  studies: 'studies/*.yaml',
  rules: 'rules/*.yaml',
  standards: 'standards/*.yaml',
}

/** Name of the published file, in `docs/`. */
export const schemaFile = (kind: Kind): string => `${kind === 'room' ? 'tendq' : kind}.schema.json`

export const KINDS = Object.keys(FILES) as readonly Kind[]

/**
 * JSON Schema (draft 2020-12) of one kind of file, made of the very schema that reads it. It describes YAML as editors see it,
 * where `5` is a number. What needs more than one value to judge (a species that exists) only `tendq check` knows.
 */
export const jsonSchemaOf = (kind: Kind): Readonly<Record<string, unknown>> => ({
  ...z.toJSONSchema(SCHEMAS[kind], { io: 'input', override: ({ jsonSchema }) => asEditorsSee(jsonSchema) }),
  title: FILES[kind],
})

/** Defaults are text to the reader; a number's default is a number to an editor. A mapping's own default says nothing new. */
const asEditorsSee = (schema: z.core.JSONSchema.BaseSchema): void => {
  const { default: preset, type } = schema
  if (typeof preset === 'string' && (type === 'number' || type === 'integer')) schema.default = Number(preset)
  if (typeof preset === 'object') delete schema.default
}

/** The published text. */
export const jsonSchemaText = (kind: Kind): string => `${JSON.stringify(jsonSchemaOf(kind), null, 2)}\n`
