import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, test } from 'vitest'
import { isControl, speciesOf, studyOf } from '../../src/config/index.ts'
import { compileRule } from '../../src/rules/index.ts'
import { configOf, EXAMPLE, exampleWith } from './folders.ts'

const ROOM = readFileSync(join(EXAMPLE, 'tendq.yaml'), 'utf8')
const AGING = readFileSync(join(EXAMPLE, 'studies/aging.yaml'), 'utf8')

const rulesFile = (...rules: readonly string[]) => `rules:\n${rules.map((rule) => `  - ${rule}\n`).join('')}`

describe('the shipped example', () => {
  test('is approved, its rules included', () => {
    const { rules } = configOf(EXAMPLE)
    expect(rules.map(compileRule).filter(({ kind }) => kind === 'refused')).toEqual([])
  })

  test('is frozen to its depth', () => {
    const config = configOf(EXAMPLE)
    const thaw = (value: unknown): boolean =>
      typeof value === 'object' && value !== null && (!Object.isFrozen(value) || Object.values(value).some(thaw))
    expect(thaw(config)).toBe(false)
  })

  test('has paths that start at the configuration folder', () => {
    const folder = exampleWith({})
    expect(configOf(folder).dataFolder).toBe(join(folder, '../var'))
    expect(configOf(folder).instruments[0]?.dropFolder).toBe(join(folder, '../drop/uv1'))
  })

  // Ciddor 1996, standard air: 512 nm in air are 512.1425 nm in vacuum (n - 1 = 2.783e-4), 19525.8 cm^-1
  test('has bands given in nm as vacuum wavenumbers', () => {
    const band = configOf(EXAMPLE).species.find(({ name }) => name === 'chloropentaammine')?.bands[0]
    expect(band?.nearPerCm).toBeCloseTo(1e7 / (512 * 1.0002783), 0)
  })

  test('has acceptance bounds ascending in wavenumber, whichever way they were written', () => {
    const { acceptance } = configOf(EXAMPLE).studies.find(({ name }) => name === 'aging-40')!
    const { pass, look } = acceptance.max1!
    expect([pass[0], look?.[0], look?.[1], pass[1]].map((x) => Math.round(1e7 / x!))).toEqual([519, 516, 508, 505])
  })

  test('says of a sample which study claims it, what it is and whether it is a control', () => {
    const config = configOf(EXAMPLE)
    const study = studyOf(config, 'AGE40-7')!
    expect(study.name).toBe('aging-40')
    expect(speciesOf(config, study)?.title).toBe('[CrCl(NH3)5]2+')
    expect([isControl(study, 'AGE40-7'), isControl(study, 'CTRL-1')]).toEqual([false, true])
    expect(studyOf(config, 'nobody')).toBeNull()
  })

  test('keeps one hash while nothing changes and another when a comment does', () => {
    const [a, b, c] = [{}, {}, { 'tendq.yaml': `${ROOM}# more\n` }].map(
      (changes) => configOf(exampleWith(changes)).sha256,
    )
    expect(a).toBe(b)
    expect(a).not.toBe(c)
  })

  test('holds the three rules that are always there, adjusted or not', () => {
    const rules = configOf(
      exampleWith({ 'rules/room.yaml': rulesFile('{ rule: unjudged, persist: 7, priority: high }') }),
    ).rules
    const always = rules.filter(({ condition }) => condition.kind === 'always')
    expect(always.map(({ name }) => name).sort()).toEqual(['common-change', 'not-this-species', 'unjudged'])
    expect(always.find(({ name }) => name === 'unjudged')).toMatchObject({ persist: 7, priority: 'high' })
  })
})

describe('names stay as they are written', () => {
  // YAML 1.2.2 core schema would make 0012 the integer 12 and 1e5 the float 100000
  test.each(['0012', '1e5', '0x10', 'true', 'null', '2026-03-02'])('a sample may be called %s', (name) => {
    const config = configOf(
      exampleWith({
        'studies/aqua.yaml': null,
        'studies/n.yaml': AGING.replace('"AGE40-*"', name).replace('study: aging-40', 'study: aqua-stock'),
        'studies/aging.yaml': AGING.replace('CTRL-1', 'CTRL-2'),
      }),
    )
    expect(studyOf(config, name)?.name).toBe('aqua-stock')
  })
})

describe('an expression is kept with the place of its first character', () => {
  test.each(['when: nu1 > 1 cm^-1', 'when: "nu1 > 1 cm^-1"', "when: 'nu1 > 1 cm^-1'"])('%s', (when) => {
    const text = rulesFile(`{ rule: a, ${when} }`)
    const rule = configOf(exampleWith({ 'rules/room.yaml': text })).rules.find(({ name }) => name === 'a')!
    const column = text.split('\n')[1]!.indexOf('nu1') + 1
    expect(rule.condition).toMatchObject({ when: { text: 'nu1 > 1 cm^-1', place: { line: 2, column } } })
  })

  test('a folded block begins at its own first line', () => {
    const folder = exampleWith({
      'rules/room.yaml': 'rules:\n  - rule: a\n    when: >\n\n      nu1 >\n      1 cm^-1\n',
    })
    const rule = configOf(folder).rules.find(({ name }) => name === 'a')!
    expect(rule.condition).toMatchObject({
      when: { text: expect.stringMatching(/^nu1 >\s1 cm\^-1$/), place: { line: 5, column: 7 } },
    })
  })
})
