import { existsSync, readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { Ajv2020 } from 'ajv/dist/2020.js'
import { describe, expect, test } from 'vitest'
import { parse } from 'yaml'
import type { Kind } from '../../src/config/files.ts'
import { jsonSchemaOf, jsonSchemaText, KINDS, schemaFile } from '../../src/config/jsonSchema.ts'
import { EXAMPLE } from './folders.ts'

const DOCS = fileURLToPath(new URL('../../docs', import.meta.url))

const filesOf = (kind: Kind): readonly string[] =>
  kind === 'room' ? ['tendq.yaml'] : readdirSync(join(EXAMPLE, kind)).map((file) => `${kind}/${file}`)

// ajv, strict, is the outside judge of the schemas; yaml's core schema reads a file as editors do
const validatorOf = (kind: Kind) =>
  new Ajv2020({ strict: true, allowUnionTypes: true, strictRequired: false }).compile(jsonSchemaOf(kind))

describe('the JSON Schema published for editors', () => {
  test('is there for every kind of file', () => {
    expect(KINDS.map((kind) => existsSync(join(DOCS, schemaFile(kind))))).toEqual(KINDS.map(() => true))
  })

  // to publish anew after a change: npx vitest run tests/config/jsonSchema.test.ts -u
  test.each(KINDS)('of %s is the one that the program reads by', async (kind) => {
    await expect(jsonSchemaText(kind)).toMatchFileSnapshot(join(DOCS, schemaFile(kind)))
  })

  test.each(KINDS)('of %s approves the shipped example', (kind) => {
    const validate = validatorOf(kind)
    for (const file of filesOf(kind)) {
      validate(parse(readFileSync(join(EXAMPLE, file), 'utf8')))
      expect(validate.errors ?? []).toEqual([])
    }
  })

  test.each([
    ['room', { room: 'a', dta: 'b' }],
    ['instruments', { instrument: 'uv1', drop: 'x', every: '6' }],
    ['species', { species: 'a', ion: 'Cr3+', geometry: 'octahedrall', ligands: {} }],
    ['studies', { study: 'a', kind: 'stability', samples: [] }],
    ['rules', { rules: [{ rule: 'a', overdue: 0 }] }],
    ['standards', { standard: 'a', source: 'b', lines: [{ at: '5 cm^-1' }] }],
  ] as const)('of %s refuses what the program refuses', (kind, value) => {
    expect(validatorOf(kind)(value)).toBe(false)
  })

  test('lets a sample be called 0012, which an editor takes for a number', () => {
    const study = parse('{ study: a, species: b, kind: repeat, samples: [ { name: 0012 } ] }')
    expect(typeof study.samples[0].name).toBe('number')
    expect(validatorOf('studies')(study)).toBe(true)
  })
})
