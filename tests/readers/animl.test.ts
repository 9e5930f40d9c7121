import { readdirSync, readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { animl } from '../../src/readers/animl.ts'
import { readSpectra } from '../../src/readers/index.ts'
import type { RawSpectrum, ReadingHints, WrittenTime } from '../../src/readers/types.ts'

/**
 * Fixtures and expectations follow ASTM E13.15 (AnIML core 0.90) and its UV/Vis technique definition; encoded values were written by
 * Python's struct module, little-endian. The namespace of core 1.0 is from memory.
 */
const FOLDER = new URL('../../fixtures/readers/animl/', import.meta.url)
const bytesOf = (kind: 'good' | 'broken', name: string) => readFileSync(new URL(`${kind}/${name}`, FOLDER))
const namesOf = (kind: 'good' | 'broken') => readdirSync(new URL(kind, FOLDER)).sort()

/** Every good file holds this curve, at 400, 405 … 500 nm unless it says otherwise, rounded to four decimals. */
const NM = Array.from({ length: 21 }, (_, i) => 400 + 5 * i)
const curve = (nm: number): number => Math.round((0.05 + 0.4 * Math.exp(-(((nm - 450) / 25) ** 2))) * 1e4) / 1e4
const HC = 1239.841984 // eV nm, CODATA

interface Expected {
  readonly x?: readonly number[]
  readonly y?: (nm: number) => number
  readonly within?: number
  readonly unit?: RawSpectrum['xUnit']
  readonly kind?: RawSpectrum['yKind']
  readonly sample?: string
  readonly time?: WrittenTime | null
  readonly pathMm?: number
  readonly temperatureC?: number
  readonly concentrationMolPerL?: number
  readonly warnings?: readonly string[]
}

const NINE: WrittenTime = { local: '2026-03-02T09:00:00', offset: '+01:00' }
const transmittance = (nm: number) => 10 ** -curve(nm)
const percent = (nm: number) => 100 * transmittance(nm)
const PER_CM = Array.from({ length: 21 }, (_, i) => 20_000 + 250 * i)
const EV = Array.from({ length: 21 }, (_, i) => 2.5 + 0.03 * i)

const GOOD: Readonly<Record<string, readonly Expected[]>> = {
  'ampere-utf16.animl': [{ warnings: ['unit-ampere'] }],
  'beside-the-spectrum.animl': [{}],
  'core-1.0-prefixed.animl': [{}],
  'counted-encoded.animl': [{}],
  'electronvolt.animl': [{ unit: 'eV', x: EV, y: (ev) => curve(HC / ev) }],
  'encoded-float32.animl': [{ within: 2 ** -25 }],
  'encoded-int32-wavenumber.animl': [{ unit: 'cm^-1', x: PER_CM, y: (perCm) => curve(1e7 / perCm), within: 5.0001e-4 }],
  'individual.animl': [{ pathMm: 10, temperatureC: 25 }],
  'int64-picometre.animl': [{}],
  'kelvin-millimetre.animl': [{ time: null, pathMm: 2, temperatureC: 25, concentrationMolPerL: 0.012 }],
  'latin-1.animl': [{ sample: 'Lösung 3', time: { local: '2026-03-02T09:15:30', offset: null } }],
  'micrometre-percent.animl': [
    {
      unit: 'um',
      x: NM.map((nm) => nm / 1000).reverse(),
      kind: 'percent-transmittance',
      y: (um) => percent(Math.round(1000 * um)),
      within: 5e-7,
      warnings: ['ordinate-scale'],
    },
  ],
  'missing-overflow.animl': [{ y: (nm) => (nm === 400 ? Number.NaN : nm >= 445 && nm <= 455 ? Infinity : curve(nm)) }],
  'percent-with-factor.animl': [{ kind: 'percent-transmittance', y: percent, within: 1e-12 }],
  'reflectance.animl': [{ kind: 'reflectance', y: transmittance, within: 1e-14 }],
  'several-steps.animl': [
    { pathMm: 10 },
    {
      sample: 'CR-8',
      y: (nm) => curve(nm) / 2,
      within: 5.0001e-6,
      time: { local: '2026-03-02T08:00:00', offset: 'Z' },
    },
  ],
  'several-value-sets.animl': [{}],
  'unit-by-factor.animl': [{}],
}

/** Code, line and column: where `<` of the element at fault stands, or where the text ceases to be XML. */
const BROKEN: Readonly<Record<string, readonly [string, number | undefined, number | undefined]>> = {
  'too-short-for-length.animl': ['series-length', 30, 11],
  'too-long-for-length.animl': ['series-length', 30, 11],
  'counted-against-length.animl': ['series-length', 17, 11],
  'two-axes.animl': ['two-axes', 30, 11],
  'no-axis.animl': ['no-axis', 16, 9],
  'no-values.animl': ['no-values', 30, 11],
  'decimal-comma.animl': ['bad-number', 38, 15],
  'word-for-number.animl': ['bad-number', 41, 15],
  'broken-base64.animl': ['bad-base64', 31, 13],
  'half-a-value.animl': ['bad-base64', 31, 13],
  'float32-said-float64.animl': ['series-length', 30, 11],
  'big-endian.animl': ['absurd-values', 31, 13],
  'indices-overlap.animl': ['index-gap', 44, 13],
  'indices-leave-out.animl': ['index-gap', 43, 13],
  'end-index-wrong.animl': ['index-count', 31, 13],
  'negative-index.animl': ['bad-index', 31, 13],
  'end-before-start.animl': ['bad-index', 31, 13],
  'no-increment.animl': ['bad-number', 23, 17],
  'two-starts.animl': ['bad-number', 19, 15],
  'counted-without-end.animl': ['no-length', 18, 13],
  'lengths-differ.animl': ['series-length', 30, 11],
  'label-against-factor.animl': ['unit-contradiction', 26, 13],
  'label-against-dimension.animl': ['unit-contradiction', 26, 13],
  'name-against-unit.animl': ['unit-contradiction', 26, 13],
  'unknown-unit.animl': ['axis-unit', 26, 13],
  'no-unit.animl': ['axis-unit', 17, 11],
  'offset-on-axis.animl': ['axis-unit', 26, 13],
  'bad-factor.animl': ['bad-unit', 27, 15],
  'two-units.animl': ['two-units', 27, 13],
  'percent-or-fraction.animl': ['ordinate-scale', 32, 13],
  'absorbance-of-89.animl': ['ordinate-scale', 32, 13],
  'unknown-ordinate.animl': ['ordinate-unknown', 30, 11],
  'ampere-or-absorbance.animl': ['unit-contradiction', 54, 13],
  'absorbance-in-metres.animl': ['unit-contradiction', 54, 13],
  'two-quantities.animl': ['unit-contradiction', 54, 13],
  'milli-or-not.animl': ['unit-contradiction', 54, 13],
  'text-axis.animl': ['series-type', 17, 11],
  'no-dependency.animl': ['no-dependency', 30, 11],
  'infinite-axis.animl': ['bad-number', 29, 15],
  'fraction-in-int32.animl': ['bad-number', 25, 15],
  'out-of-range.animl': ['axis-unit', 19, 15],
  'axis-end-misprint.animl': ['axis-jump', 39, 15],
  'other-technique-only.animl': ['other-technique', 8, 7],
  'no-technique.animl': ['no-technique', 7, 5],
  'no-results.animl': ['no-spectrum', 2, 1],
  'baseline-only.animl': ['not-a-spectrum', 15, 7],
  'time-course-only.animl': ['not-a-spectrum', 16, 9],
  'unknown-version.animl': ['unknown-version', 2, 1],
  'version-contradiction.animl': ['unknown-version', 2, 1],
  'bad-length.animl': ['bad-length', 16, 9],
  'absurd-length.animl': ['too-large', 18, 13],
  'cut-short.animl': ['cut-short', 38, 19],
  'wrong-end-tag.animl': ['bad-xml', 21, 27],
  'unknown-entity.animl': ['bad-xml', 7, 36],
  'attribute-twice.animl': ['bad-xml', 16, 59],
  'doctype.animl': ['doctype', 2, 1],
  'says-utf8-is-latin1.animl': ['encoding', undefined, undefined],
  'unknown-encoding.animl': ['encoding', undefined, undefined],
}

describe('good AnIML files', () => {
  it('are all in the table', () => expect(namesOf('good')).toEqual(Object.keys(GOOD).sort()))

  it.each(Object.entries(GOOD))('%s reads to its curve and its facts', (name, expected) => {
    const bytes = bytesOf('good', name)
    expect(animl.confidence(bytes)).toBe(1)
    const reading = readSpectra(bytes, name, {})
    if (reading.kind === 'refused') throw new Error(reading.faults[0].what)
    expect(reading.format).toBe(name.startsWith('core-1.0') ? 'AnIML 1.0' : 'AnIML 0.90')
    expect(reading.spectra).toHaveLength(expected.length)
    for (const [i, { x = NM, y = curve, within = 0, ...facts }] of expected.entries()) {
      const spectrum = reading.spectra[i]!
      expect(spectrum.index).toBe(i)
      expect([...spectrum.x].map((v) => (Math.abs(v) < 10 ? Number(v.toPrecision(12)) : v))).toEqual(
        x.map((v) => (Math.abs(v) < 10 ? Number(v.toPrecision(12)) : v)),
      )
      for (const [k, v] of x.entries()) {
        const [got, want] = [spectrum.y[k]!, y(v)]
        if (Number.isFinite(want)) expect(Math.abs(got - want)).toBeLessThanOrEqual(within)
        else expect(got).toBe(want)
      }
      expect({
        unit: spectrum.xUnit,
        kind: spectrum.yKind,
        sample: spectrum.sample,
        time: spectrum.time,
        pathMm: spectrum.pathMm,
        temperatureC: spectrum.temperatureC,
        concentrationMolPerL: spectrum.concentrationMolPerL,
        warnings: spectrum.warnings.map(({ code }) => code),
      }).toEqual({
        unit: 'nm',
        kind: 'absorbance',
        sample: 'CR-7',
        time: NINE,
        pathMm: null,
        temperatureC: null,
        concentrationMolPerL: null,
        warnings: [],
        ...facts,
      })
    }
  })

  it('say what they hold besides and was passed over, with its line', () => {
    const warnings = (name: string) => {
      const reading = readSpectra(bytesOf('good', name), name, {})
      return reading.kind === 'read' ? reading.warnings.map(({ code, place }) => [code, place.line !== undefined]) : []
    }
    expect(warnings('several-steps.animl')).toEqual([['other-technique', true]])
    expect(warnings('beside-the-spectrum.animl')).toEqual([
      ['not-a-spectrum', true],
      ['other-series', true],
      ['other-series', true],
    ])
  })
})

describe('broken AnIML files', () => {
  it('are all in the table', () => expect(namesOf('broken')).toEqual(Object.keys(BROKEN).sort()))

  it.each(Object.entries(BROKEN))('%s is refused at its place', (name, [code, line, column]) => {
    const reading = readSpectra(bytesOf('broken', name), name, {})
    if (reading.kind === 'read') throw new Error('was read')
    const [{ place, ...fault }] = reading.faults
    expect([fault.code, place.line, place.column]).toEqual([code, line, column])
    expect(fault.remedy).not.toBe('')
  })

  it.each<[string, ReadingHints, string]>([
    ['percent-or-fraction.animl', { y: 'transmittance' }, 'transmittance'],
    ['label-against-factor.animl', { x: 'nm' }, 'absorbance'],
    ['unknown-ordinate.animl', { y: 'absorbance' }, 'absorbance'],
    ['no-unit.animl', { x: 'nm' }, 'absorbance'],
  ])('%s is read once a person has said what is meant', (name, hints, kind) => {
    const reading = readSpectra(bytesOf('broken', name), name, hints)
    expect(reading.kind === 'read' && [reading.spectra[0]!.yKind, [...reading.spectra[0]!.x]]).toEqual([kind, NM])
  })

  it('a fraction or percent that never exceeds 1.2 is offered both ways as YAML', () => {
    const reading = readSpectra(bytesOf('broken', 'percent-or-fraction.animl'), 'a', {})
    expect(reading.kind === 'refused' && reading.settle).toEqual([
      'reading: { y: percent-transmittance }',
      'reading: { y: transmittance }',
    ])
  })

  it('keep the whole spectra beside the broken one', () => {
    const text = bytesOf('good', 'several-steps.animl').toString().replace('<D>0.45</D>', '<D>0,45</D>')
    const reading = readSpectra(Buffer.from(text), 'a', {})
    expect(reading.kind).toBe('refused')
    expect(reading.spectra.map(({ sample }) => sample)).toEqual(['CR-8'])
  })
})

const TYPES = ['Int32', 'Int64', 'Float32', 'Float64'] as const
type NumberType = (typeof TYPES)[number]
const TAG: Readonly<Record<NumberType, string>> = { Int32: 'I', Int64: 'L', Float32: 'F', Float64: 'D' }

interface WrittenSeries {
  readonly name: string
  readonly dependency: 'independent' | 'dependent'
  readonly type: NumberType
  readonly form: 'individual' | 'encoded' | 'auto'
  readonly values: readonly number[]
  /** Where a second value set begins; 0 for one set. */
  readonly split: number
  readonly indices: boolean
  readonly unitFirst: boolean
  readonly unit: string
}

const base64 = (type: NumberType, values: readonly number[]): string => {
  const bytes = Buffer.alloc(values.length * (type.endsWith('32') ? 4 : 8))
  for (const [i, v] of values.entries()) {
    if (type === 'Int32') bytes.writeInt32LE(v, 4 * i)
    else if (type === 'Int64') bytes.writeBigInt64LE(BigInt(v), 8 * i)
    else if (type === 'Float32') bytes.writeFloatLE(v, 4 * i)
    else bytes.writeDoubleLE(v, 8 * i)
  }
  return bytes.toString('base64')
}

const writeSet = (s: WrittenSeries, from: number, to: number): string => {
  const part = s.values.slice(from, to)
  const indices = s.indices ? ` startIndex="${from}" endIndex="${to - 1}"` : ''
  const one = (v: number) => `<${TAG[s.type]}>${v}</${TAG[s.type]}>`
  if (s.form === 'individual') return `<IndividualValueSet${indices}>${part.map(one).join('\n')}</IndividualValueSet>`
  if (s.form === 'encoded') return `<EncodedValueSet${indices}>${base64(s.type, part)}</EncodedValueSet>`
  const step = s.values[1]! - s.values[0]!
  return `<AutoIncrementedValueSet${indices}><StartValue>${one(part[0]!)}</StartValue><Increment>${one(step)}</Increment></AutoIncrementedValueSet>`
}

const writeSeries = (s: WrittenSeries): string => {
  const split = s.form === 'auto' ? 0 : s.split
  const sets =
    split === 0 ? [writeSet(s, 0, s.values.length)] : [writeSet(s, 0, split), writeSet(s, split, s.values.length)]
  const content = s.unitFirst ? [s.unit, ...sets] : [...sets, s.unit]
  return `<Series name="${s.name}" seriesID="${s.name}" dependency="${s.dependency}" seriesType="${s.type}">${content.join('\n')}</Series>`
}

const writeDocument = (series: readonly WrittenSeries[]): string => `<?xml version="1.0"?>
<AnIML xmlns="urn:org:astm:animl:schema:core:draft:0.90" version="0.90"><ExperimentStepSet>
<ExperimentStep name="made up" experimentStepID="e"><Technique name="UV/Vis" uri="uv-vis.atdd"/>
<Result name="Spectrum"><SeriesSet name="Spectrum" length="${series[0]!.values.length}">${series.map(writeSeries).join('\n')}</SeriesSet></Result>
</ExperimentStep></ExperimentStepSet></AnIML>`

const layout = (n: number) =>
  fc.record({
    form: fc.constantFrom('individual', 'encoded'),
    split: fc.integer({ min: 0, max: n - 1 }),
    indices: fc.boolean(),
    unitFirst: fc.boolean(),
  })

/** Whole picometres for the types of whole numbers, nanometres for the others, in a binary step so that it can be counted up. */
const axis = fc
  .record({
    type: fc.constantFrom(...TYPES),
    auto: fc.boolean(),
    n: fc.integer({ min: 4, max: 60 }),
    start: fc.integer({ min: 1600, max: 6400 }),
    step: fc.integer({ min: 1, max: 20 }),
    down: fc.boolean(),
  })
  .chain(({ type, auto, n, start, step, down }) => {
    const whole = type.startsWith('Int')
    const inNm = Array.from({ length: n }, (_, i) => (start + i * step) / 8)
    const nm = down ? inNm.reverse() : inNm
    const factor = whole ? 'label="pm"><SIUnit factor="1E-12">m' : 'label="nm"><SIUnit factor="1E-9">m'
    return layout(n).map((written) => ({
      nm,
      series: {
        ...written,
        form: auto ? ('auto' as const) : written.form,
        name: 'Wavelength',
        dependency: 'independent' as const,
        type,
        values: whole ? nm.map((v) => v * 1000) : nm,
        unit: `<Unit ${factor}</SIUnit></Unit>`,
      },
    }))
  })

/** Whole milliabsorbance for the types of whole numbers, anything the type holds for the others. */
const ordinate = (n: number) =>
  fc
    .record({
      type: fc.constantFrom(...TYPES),
      y: fc.array(fc.integer({ min: -300, max: 3000 }), { minLength: n, maxLength: n }),
    })
    .chain(({ type, y }) => {
      const whole = type.startsWith('Int')
      const values = whole ? y : y.map((v) => (type === 'Float32' ? Math.fround(v / 999.7) : v / 999.7))
      const unit = whole ? 'label="mAU"><SIUnit factor="0.001">1' : 'label="AU"><SIUnit>1'
      return layout(n).map((written) => ({
        absorbance: whole ? y.map((v) => v / 1000) : values,
        series: {
          ...written,
          name: 'Absorbance',
          dependency: 'dependent' as const,
          type,
          values,
          unit: `<Unit ${unit}</SIUnit></Unit>`,
        },
      }))
    })

describe('any AnIML spectrum', () => {
  it('reads back exactly, whatever the type, the form, the order of sets and unit, and the index attributes', () => {
    const written = axis.chain((x) => fc.record({ x: fc.constant(x), y: ordinate(x.nm.length), swap: fc.boolean() }))
    fc.assert(
      fc.property(written, ({ x, y, swap }) => {
        const text = writeDocument(swap ? [y.series, x.series] : [x.series, y.series])
        const reading = readSpectra(Buffer.from(text), 'made-up', {})
        if (reading.kind === 'refused') throw new Error(reading.faults[0].what)
        const [spectrum] = reading.spectra
        expect([...spectrum!.x]).toEqual(x.nm)
        expect([...spectrum!.y].map((v) => v + 0)).toEqual(y.absorbance.map((v) => v + 0))
        expect(spectrum!.warnings).toEqual([])
      }),
      { numRuns: 400, seed: 5 },
    )
  })

  it('of any length that differs from what its SeriesSet says is refused', () => {
    const written = axis.chain((x) =>
      fc.record({ x: fc.constant(x), y: ordinate(x.nm.length), by: fc.constantFrom(-1, 1, 7) }),
    )
    fc.assert(
      fc.property(written, ({ x, y, by }) => {
        const n = x.nm.length
        const text = writeDocument([x.series, y.series]).replace(` length="${n}"`, ` length="${n + by}"`)
        expect(readSpectra(Buffer.from(text), 'made-up', {}).kind).toBe('refused')
      }),
      { numRuns: 100, seed: 5 },
    )
  })
})

describe('hostile AnIML', () => {
  const whole = bytesOf('good', 'individual.animl').toString()
  const root = '<AnIML '
  const laughs = Array.from({ length: 30 }, (_, i) => `<!ENTITY l${i + 1} "${`&l${i};`.repeat(10)}">`).join('\n')
  const cases: readonly (readonly [string, string, string])[] = [
    [
      'entities that would grow to 10³⁰ pieces',
      whole.replace(root, `<!DOCTYPE AnIML [<!ENTITY l0 "ha">${laughs}]>${root}`),
      'doctype',
    ],
    [
      'an entity that would draw in another file',
      whole
        .replace(root, `<!DOCTYPE AnIML [<!ENTITY e SYSTEM "file:///etc/hostname">]>${root}`)
        .replace('aged 7 d', '&e;'),
      'doctype',
    ],
    ['elements 10,000 deep', whole.replace('<Result ', `${'<Category name="c">'.repeat(10_000)}<Result `), 'too-deep'],
    [
      'foreign elements 10,000 deep',
      whole.replace('<SampleSet>', `${'<z:z xmlns:z="z">'.repeat(10_000)}<SampleSet>`),
      'too-deep',
    ],
    ['an attribute of 5 MB', whole.replace('aged 7 d', 'a'.repeat(5_000_000)), 'too-large'],
    ['a name of 5 MB', whole.replace('<Result ', `<${'R'.repeat(5_000_000)} `), 'bad-xml'],
    ['a number of 5 MB', whole.replace('<D>400</D>', `<D>${'4'.repeat(5_000_000)}</D>`), 'bad-number'],
    ['an exponent of 5 MB', whole.replace('<D>400</D>', `<D>4e${'0'.repeat(5_000_000)}</D>`), 'bad-number'],
    ['250,000 elements too many', whole.replace('<SampleSet>', `${'<Tag/>'.repeat(250_000)}<SampleSet>`), 'too-large'],
    ['33 million blanks', whole.replace('<SampleSet>', `${' '.repeat(34_000_000)}<SampleSet>`), 'too-large'],
    [
      '100,000 attributes',
      whole.replace(root, `${root}${Array.from({ length: 100_000 }, (_, i) => `a${i}=""`).join(' ')} `),
      'too-large',
    ],
  ]

  it.each(cases)('%s: refused within two seconds', (_, text, code) => {
    const bytes = Buffer.from(text)
    const started = performance.now()
    const reading = animl.read(bytes, 'hostile', {})
    expect(performance.now() - started).toBeLessThan(2000)
    expect(reading.kind === 'refused' && reading.faults[0].code).toBe(code)
  })

  it('names of samples, units and parameters that are names of built-in properties are only names', () => {
    for (const name of ['__proto__', 'constructor', 'toString', 'hasOwnProperty']) {
      const sample = readSpectra(Buffer.from(whole.replaceAll('CR-7', name).replaceAll('x1', name)), 'a', {})
      expect(sample.kind === 'read' && sample.spectra[0]!.sample).toBe(name)
      for (const label of [
        'label="nm"',
        'label="AU"',
        'name="Wavelength"',
        'name="Temperature"',
        'seriesType="Float64"',
      ]) {
        const changed = whole.replaceAll(label, label.replace(/"[^"]*"/, `"${name}"`))
        expect(['read', 'refused']).toContain(readSpectra(Buffer.from(changed), 'a', {}).kind)
      }
    }
  })

  it('elements of another namespace and other instructions are disregarded', () => {
    const text = whole.replace(
      '<SampleSet>',
      '<?xml-stylesheet href="a.xsl"?><x:include xmlns:x="urn:x" href="b.xml"/><SampleSet>',
    )
    expect(readSpectra(Buffer.from(text), 'a', {}).kind).toBe('read')
  })
})

describe('damaged AnIML', () => {
  const good = namesOf('good').map((name) => ({ name, bytes: bytesOf('good', name) }))
  const damage = fc.record({
    file: fc.constantFrom(...good),
    // whole numbers, since drawn doubles crowd at 0
    at: fc.integer({ min: 0, max: 999_999 }).map((v) => v / 1e6),
    how: fc.constantFrom('set', 'cut', 'double', 'insert', 'end'),
    span: fc.integer({ min: 1, max: 60 }),
    byte: fc.oneof(fc.constantFrom(...Buffer.from('0123456789.,-eE<>/"&; =')), fc.integer({ min: 0, max: 255 })),
  })
  type Damage = typeof damage extends fc.Arbitrary<infer T> ? T : never
  const damaged = ({ file, at, how, span, byte }: Damage): Buffer => {
    const { bytes } = file
    const i = Math.floor(at * bytes.length)
    const [head, tail] = [bytes.subarray(0, i), bytes.subarray(i)]
    if (how === 'set') return Buffer.concat([head, Buffer.from([byte]), tail.subarray(1)])
    if (how === 'cut') return Buffer.concat([head, tail.subarray(span)])
    if (how === 'double') return Buffer.concat([head, tail.subarray(0, span), tail])
    if (how === 'insert') return Buffer.concat([head, Buffer.from([byte]), tail])
    return head
  }

  it('never crashes or hangs; what is read is whole', () => {
    fc.assert(
      fc.property(damage, (d) => {
        const started = performance.now()
        const reading = animl.read(damaged(d), d.file.name, {})
        expect(performance.now() - started).toBeLessThan(2000)
        if (reading.kind === 'refused') expect(reading.faults[0].remedy).not.toBe('')
        for (const { x, y } of reading.spectra) expect([x.every(Number.isFinite), y.length]).toEqual([true, x.length])
      }),
      { numRuns: 2000, seed: 5 },
    )
  })

  // a start or an increment that is misprinted has nothing in the file that contradicts it; listed values and encoded ones have
  it('whose axis is written out never moves a point by more than a step without a word', () => {
    const written = good.filter(({ name }) =>
      ['individual.animl', 'encoded-float32.animl', 'int64-picometre.animl'].includes(name),
    )
    fc.assert(
      fc.property(fc.record({ damage, file: fc.constantFrom(...written) }), ({ damage: d, file }) => {
        const reading = animl.read(damaged({ ...d, file }), file.name, {})
        if (reading.kind === 'refused' || reading.warnings.length > 0) return
        for (const { x, xUnit, warnings } of reading.spectra) {
          if (warnings.length > 0) continue
          expect(xUnit).toBe('nm')
          expect(x).toHaveLength(NM.length)
          for (const [i, nm] of NM.entries()) expect(Math.abs(x[i]! - nm)).toBeLessThanOrEqual(5)
        }
      }),
      { numRuns: 3000, seed: 5 },
    )
  })
  it.each([
    ['individual.animl', /<D>\d+<\/D>/g, '0123456789'],
    ['int64-picometre.animl', /<L>\d+<\/L>/g, '0123456789'],
    ['encoded-float32.animl', /(?<=<EncodedValueSet>)[^<]+/, 'AEQUgkw05/'],
  ])(
    '%s with any one character of its axis changed moves no point by more than a step without a word',
    (name, values, by) => {
      const text = bytesOf('good', name).toString()
      const end = text.indexOf('</Series>')
      let [tried, moved] = [0, 0]
      for (const { index, 0: value } of text.slice(0, end).matchAll(new RegExp(values, 'g'))) {
        for (let i = index; i < index + value.length; i++) {
          if (!/[A-Za-z0-9+/]/.test(text[i]!) || (by === '0123456789' && !/\d/.test(text[i]!))) continue
          for (const other of by) {
            const reading = animl.read(Buffer.from(text.slice(0, i) + other + text.slice(i + 1)), name, {})
            tried++
            if (reading.kind === 'refused') continue
            const { x, warnings } = reading.spectra[0]!
            const off = Math.max(...NM.map((nm, k) => Math.abs(x[k]! - nm)))
            if (off > 0) moved++
            if (warnings.length === 0) expect(off).toBeLessThanOrEqual(5)
          }
        }
      }
      expect(tried).toBeGreaterThan(600)
      expect(moved).toBeGreaterThan(100)
    },
  )
})
