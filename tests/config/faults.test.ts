import { readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { loadConfig } from '../../src/config/index.ts'
import { compileRule } from '../../src/rules/index.ts'
import { EXAMPLE, exampleWith, faultsWith } from './folders.ts'

const ROOM = readFileSync(join(EXAMPLE, 'tendq.yaml'), 'utf8')
const AGING = readFileSync(join(EXAMPLE, 'studies/aging.yaml'), 'utf8')
const UV1 = readFileSync(join(EXAMPLE, 'instruments/uv1.yaml'), 'utf8')
const BANDS = readFileSync(join(EXAMPLE, 'rules/bands.yaml'), 'utf8')

const rulesFile = (...rules: readonly string[]) => `rules:\n${rules.map((rule) => `  - ${rule}\n`).join('')}`

describe('every fault is named at its place', () => {
  const fault = (changes: Readonly<Record<string, string | Uint8Array | null>>) => faultsWith(changes)
  const inRoom = (from: string | RegExp, to: string) => fault({ 'tendq.yaml': ROOM.replace(from, to) })
  const inAging = (from: string | RegExp, to: string) => fault({ 'studies/aging.yaml': AGING.replace(from, to) })

  test('a misspelt key, with the key that was meant', () => {
    expect(inRoom('timezone:', 'timezon:')).toEqual([
      'tendq.yaml:4:1 timezone is missing; add `timezone:`',
      'tendq.yaml:11:1 unknown key "timezon"; did you mean "timezone"?',
    ])
  })

  test('a time of day that is none, and quiet hours that never end', () => {
    const at = ROOM.split('\n').findIndex((line) => line.startsWith('daily:')) + 1
    expect(inRoom('daily: "07:00"', 'daily: 7 am')).toEqual([
      `tendq.yaml:${at}:8 daily: "7 am" is no time of day; write hours and minutes, such as "07:00"`,
    ])
    expect(inRoom('daily: "07:00"', 'quiet: [ { to: a@lab.example, from: "22:00", until: "22:00" } ]')).toEqual([
      `tendq.yaml:${at}:53 the quiet hours never end; write another end than the beginning`,
    ])
  })

  test('all of several files at once, in the order of files and lines', () => {
    const faults = fault({
      'tendq.yaml': ROOM.replace('port: 25', 'port: 70000').replace('Europe/Dublin', 'Europe/Dubln'),
      'studies/aging.yaml': AGING.replace('40 degC,', '40 C,').replace('species: chloro', 'species: cloro'),
    })
    expect(faults.map((text) => text.split(' ')[0]?.split(':')[0])).toEqual([
      'studies/aging.yaml',
      'studies/aging.yaml',
      'tendq.yaml',
      'tendq.yaml',
    ])
    expect(faults.join('\n')).toMatch(
      /did you mean chloropentaammine\?[\s\S]*did you mean degC\?[\s\S]*did you mean Europe\/Dublin\?/,
    )
  })

  test('an empty file', () => {
    expect(fault({ 'species/empty.yaml': '# nothing\n' })).toEqual([
      expect.stringContaining('species/empty.yaml:1:1 the file is empty, or holds comments only'),
    ])
  })

  test.each([
    ['a: 1\na: 2\n', ':2:1 this key stands twice'],
    ['a: !!int 5\n', 'Unresolved tag'],
    ['a: 1\n---\nb: 2\n', ':2:1 a second document'],
    ['a: *nobody\n', '*nobody'],
    ['a: &x [ *x ]\n', 'holds itself'],
    ['a:\n\tb: 1\n', ':2:1'],
    ['? [ 1 ]\n: 2\n', 'a key must be a word'],
    ['- a\n- b\n', 'is a list'],
    [new Uint8Array([0x61, 0x3a, 0x20, 0xff]), 'not UTF-8'],
  ])('%j is no configuration', (text, what) => {
    expect(fault({ 'species/odd.yaml': text })[0]).toContain(what)
  })

  test('a merge key is a key like any other, and unknown', () => {
    expect(inAging('replicates:', '<<: { kind: repeat }\nreplicates:').join()).toContain('unknown key "<<"')
  })

  test('values that stand for ever more values', () => {
    const bomb = [
      'a0: &a0 [x,x,x,x,x,x,x,x,x,x]',
      ...[1, 2, 3, 4, 5, 6].map(
        (n) =>
          `a${n}: &a${n} [${Array(10)
            .fill(`*a${n - 1}`)
            .join(',')}]`,
      ),
    ]
    expect(fault({ 'species/odd.yaml': `${bomb.join('\n')}\n` })[0]).toContain('too many values')
  })

  test.each([
    ['a YAML file in an unknown folder', 'rule/a.yaml', 'did you mean rules?'],
    ['a YAML file with another ending', 'rules/a.yml', 'rename it'],
    ['a YAML file beside tendq.yaml', 'more.yaml', 'put it into'],
  ])('%s', (_, path, remedy) => expect(fault({ [path]: 'a: 1\n' })).toEqual([expect.stringContaining(remedy)]))

  test('a folder without tendq.yaml', () =>
    expect(fault({ 'tendq.yaml': null })[0]).toContain('tendq.yaml there is no such file'))

  test('a room without an instrument', () =>
    expect(fault({ 'instruments/uv1.yaml': null, 'instruments/uv2.yaml': null })).toEqual([
      expect.stringContaining('nothing would be watched'),
    ]))

  test('a folder that has gone', () => {
    expect(loadConfig(join(exampleWith({}), 'gone'))).toMatchObject({
      kind: 'refused',
      faults: [{ what: 'the folder cannot be read (ENOENT)' }],
    })
  })

  test('a comma for columns and for decimals', () =>
    expect(fault({ 'instruments/uv1.yaml': UV1.replace('delimiter: ";"', 'delimiter: ","') }).join()).toContain(
      'the comma cannot both',
    ))

  // no outside reference: whatever a hand or a disk does to a file, the answer is faults with places, never a crash
  test('whatever was cut, doubled or mistyped, at a place that is there', () => {
    const paths = [
      'tendq.yaml',
      'instruments/uv1.yaml',
      'species/chloropentaammine.yaml',
      'studies/aging.yaml',
      'rules/bands.yaml',
    ]
    const folder = exampleWith({})
    const damage = fc.record({
      path: fc.constantFrom(...paths),
      at: fc.double({ min: 0, max: 1, noNaN: true }),
      cut: fc.nat(40),
      typed: fc.string({
        unit: fc.constantFrom(
          ':',
          ' ',
          '-',
          '[',
          '{',
          '"',
          '&a',
          '*a',
          '\n',
          '\t',
          '#',
          '?',
          'x',
          '0',
          '|',
          '!!',
          '<<',
          '%',
        ),
        maxLength: 4,
      }),
    })
    fc.assert(
      fc.property(damage, ({ path, at, cut, typed }) => {
        const whole = readFileSync(join(EXAMPLE, path), 'utf8')
        const from = Math.floor(at * whole.length)
        const text = whole.slice(0, from) + typed + whole.slice(from + cut)
        writeFileSync(join(folder, path), text)
        const loaded = loadConfig(folder)
        writeFileSync(join(folder, path), whole)
        const lines = text.split('\n')
        return (
          loaded.kind === 'loaded' ||
          loaded.faults.every(
            ({ place, what, remedy }) =>
              what !== '' &&
              remedy !== '' &&
              (!place.at.endsWith(path) || place.line === undefined || place.line <= lines.length + 1),
          )
        )
      }),
      { numRuns: 150 },
    )
  })

  describe('what the room lets out', () => {
    test('letters in clear text beyond this machine', () =>
      expect(inRoom('host: 127.0.0.1', 'host: mail.lab.example').join()).toContain('would travel in clear text'))
    test.each(['localhost', '127.0.0.9', '"::1"'])('but not on %s', (host) =>
      expect(inRoom('host: 127.0.0.1', `host: ${host}`)).toEqual([]),
    )
    test('a page beyond this machine without a token', () =>
      expect(inRoom('127.0.0.1:8043', '"[::]:8043"').join()).toContain('can be reached by others'))
    test('but not with one', () =>
      expect(inRoom('listen: 127.0.0.1:8043', 'listen: 0.0.0.0:8043, token: { file: t }')).toEqual([]))
    test('a password in the text, which is not repeated', () => {
      const faults = inRoom('security: none', 'security: none\n  user: tendq\n  password: hunter2').join()
      expect(faults).toContain('say where it is kept')
      expect(faults).not.toContain('hunter2')
    })
    test('two places for one secret', () =>
      expect(inRoom('security: none', 'security: none\n  user: u\n  password: { env: A, file: b }').join()).toContain(
        'exclude each other',
      ))
  })

  describe('drop folders', () => {
    const uv2 = readFileSync(join(EXAMPLE, 'instruments/uv2.yaml'), 'utf8')
    const drop = (folder: string) => fault({ 'instruments/uv2.yaml': uv2.replace('../drop/uv2', folder) }).join()
    test('of two instruments in one', () => expect(drop('../drop/uv1/')).toContain('is the folder of uv1 too'))
    test('inside each other', () => expect(drop('../drop/uv1/today')).toContain('lies inside'))
    test('around each other', () => expect(drop('../drop')).toContain('holds'))
    test('around the database', () => expect(drop('../var')).toContain('the room (its data)'))
    test('side by side with a longer name of the same beginning are right', () => expect(drop('../drop/uv10')).toBe(''))
    test('two instruments of one name', () =>
      expect(fault({ 'instruments/uv2.yaml': uv2.replace('instrument: uv2', 'instrument: uv1') }).join()).toContain(
        'already',
      ))
  })

  describe('studies', () => {
    test('of a species that does not exist', () =>
      expect(inAging('species: chloropentaammine', 'species: chloropentamine').join()).toContain(
        'did you mean chloropentaammine?',
      ))
    test('a sample that two studies name', () => expect(inAging('CTRL-1', 'EN3-GOLD').join()).toContain('EN3-GOLD'))
    test('a sample that a name and a wildcard claim', () =>
      expect(inAging('CTRL-1', 'EN3-B7').join()).toContain('"EN3-B*"'))
    test('wildcards that share a name, which is told', () =>
      expect(inAging('"AGE40-*"', '"E*7"').join()).toContain('a sample EN3-B7'))
    test('that end before they begin', () =>
      expect(inAging('ends: 2026-03-30', 'ends: 2025-03-30').join()).toContain('ends before it began'))
    test('with a time without offset', () => expect(inAging('09:00:00Z', '09:00:00').join()).toContain('no offset'))
    test('with a criterion for an unknown quantity', () =>
      expect(inAging('max1:', 'maxx1:').join()).toContain('did you mean max1?'))
    test('with a wavelength for Racah B', () =>
      expect(inAging('max1:', 'b:').join()).toContain('the units that fit are cm^-1'))
    test('whose look is wider than their pass', () =>
      expect(inAging('508 nm', '500 nm').join()).toContain('beyond that of pass'))
    test('compared with a sample that nobody claims', () =>
      expect(inAging('{ first: 5 }', '{ sample: GOLD }').join()).toContain('no study claims'))
    test('compared with a sample of another species', () =>
      expect(inAging('{ first: 5 }', '{ sample: EN3-GOLD }').join()).toContain('another species'))
    test('whose ages do not ascend', () =>
      expect(inAging('{ every: 6 h }', '[ 0 d, 3 d, 1 d ]').join()).toContain('do not ascend'))
    test('without species, unless they check a standard', () =>
      expect(inAging('species: chloropentaammine\n', '').join()).toContain('add `species:`'))
  })

  describe('species', () => {
    const species = (text: string) =>
      fault({ 'species/new.yaml': `species: new\ngeometry: octahedral\nligands: { H2O: 6 }\n${text}\n` }).join()
    test('of an unknown ion, with the nearest', () => expect(species('ion: Cr3')).toContain('new.yaml:4:6'))
    test('of an ion without d electrons to excite', () => expect(species('ion: Zn2+')).toContain('d10'))
    test('that may be high-spin or low-spin must say which', () =>
      expect(species('ion: Co3+')).toContain('high-spin and low-spin'))
    // roles: Sugano, Tanabe, Kamimura, Multiplets of Transition-Metal Ions (1970): d3 in Oh has three spin-allowed bands
    test('with a band that the ion does not have', () =>
      expect(species('ion: Cr3+\nbands: [ { role: nu4, near: 400 nm, within: 5 nm } ]')).toContain('has no band "nu4"'))
    test('with the parts of a split band are right', () =>
      expect(
        species(
          'ion: Cr3+\nbands: [ { role: nu1a, near: 600 nm, within: 5 nm }, { role: nu1b, near: 500 nm, within: 5 nm } ]',
        ),
      ).toBe(''))
    test('with a range that reaches to zero', () =>
      expect(species('ion: Cr3+\nbands: [ { role: nu1, near: 400 nm, within: 400 nm } ]')).toContain('reaches to zero'))
  })

  describe('rules', () => {
    const rules = (...lines: readonly string[]) => fault({ 'rules/room.yaml': rulesFile(...lines) }).join('\n')
    test('without a condition', () => expect(rules('{ rule: a }')).toContain('no condition'))
    test('with two', () =>
      expect(rules('{ rule: a, when: nu1 > 1 cm^-1, overdue: 2 }')).toContain('exclude each other'))
    test('with clear but no when', () =>
      expect(rules('{ rule: a, overdue: 2, clear: nu1 > 1 cm^-1 }')).toContain('clear belongs'))
    test('for studies that do not exist', () =>
      expect(rules('{ rule: a, overdue: 2, studies: [ aging-4 ] }')).toContain('did you mean aging-40?'))
    test('of one name', () => expect(rules('{ rule: first-band-shift, overdue: 2 }')).toContain('already'))
    test('that take the condition from one that is always there', () =>
      expect(rules('{ rule: unjudged, overdue: 2 }')).toContain('condition built in'))
    test('with a figure of another chart', () =>
      expect(rules('{ rule: a, chart: { kind: ewma, of: nu1, k: 1 } }')).toContain('takes lambda and l'))
    test('wrong in their expressions are told with everything else, at the very column', () => {
      const folder = exampleWith({
        'rules/room.yaml': rulesFile('{ rule: a, when: "nu1 > 5 h" }', '{ rule: b, overdue: never }'),
      })
      const loaded = loadConfig(folder, (rule) => {
        const compilation = compileRule(rule)
        return compilation.kind === 'refused' ? compilation.faults : []
      })
      expect(loaded.kind === 'refused' && loaded.faults.map(({ place }) => place.line)).toEqual([2, 3])
    })
    test('an example with every rule taken out is still judged by the three', () =>
      expect(fault({ 'rules/room.yaml': null, 'rules/parameters.yaml': null, 'rules/bands.yaml': BANDS })).toEqual([]))
  })
})
