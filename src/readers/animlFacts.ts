/** Facts around an AnIML spectrum: which sample was measured, when, in what cell, how warm. */
import { unitOf } from './animlUnits.ts'
import { childOf, childrenOf, type Element, type Flaw } from './animlXml.ts'
import { type Facts, factsOf, type Pair } from './facts.ts'
import { timeOf } from './times.ts'
import type { WrittenTime } from './types.ts'
import { factOf, plainWords } from './words.ts'

export type Remark = Flaw

const remark = (at: Element, code: string, what: string, remedy: string): Remark => ({
  kind: 'flaw',
  code,
  offset: at.offset,
  what,
  remedy,
})

interface Found<T> {
  readonly value: T | null
  readonly remarks: readonly Remark[]
}

/** Roles of what is in the beam besides the sample itself. */
const BESIDE = /reference|blank|solvent|standard|baseline|background|matrix/i

/** The Sample element that a step measures; null, with a remark where that needs saying, if there is not exactly one. */
export const sampleOf = (root: Element, step: Element): Found<Element> => {
  const set = childOf(childOf(step, 'Infrastructure') ?? step, 'SampleReferenceSet')
  const all = set === null ? [] : childrenOf(set, 'SampleReference')
  const consumed = all.filter(({ attributes }) => attributes.samplePurpose !== 'produced')
  const tested = consumed.filter(({ attributes }) => /test sample/i.test(attributes.role ?? ''))
  const references =
    tested.length > 0 ? tested : consumed.filter(({ attributes }) => !BESIDE.test(attributes.role ?? ''))
  const [reference, second] = references
  if (!reference) return { value: null, remarks: [] }
  const ask = 'give each step one sample of role "Test Sample"'
  if (second && second.attributes.sampleID !== reference.attributes.sampleID) {
    const what = `the step names ${references.length} samples, and not which of them was measured`
    return { value: null, remarks: [remark(second, 'several-samples', what, ask)] }
  }
  const id = reference.attributes.sampleID ?? ''
  const samples = childrenOf(childOf(root, 'SampleSet') ?? root, 'Sample').filter(
    ({ attributes }) => attributes.sampleID === id,
  )
  if (samples.length === 1) return { value: samples[0]!, remarks: [] }
  const what =
    samples.length === 0
      ? `there is no sample with the sampleID "${id}"`
      : `${samples.length} samples have the sampleID "${id}"`
  return {
    value: null,
    remarks: [remark(reference, 'unknown-sample', what, 'export the file again with its SampleSet')],
  }
}

/** The time at which a step was done. */
export const timestampOf = (step: Element): Found<WrittenTime> => {
  const element = childOf(childOf(step, 'Infrastructure') ?? step, 'Timestamp')
  if (element === null) return { value: null, remarks: [] }
  const reading = timeOf(element.text)
  if (reading.kind === 'time') return { value: reading.time, remarks: [] }
  const what = `the time of measurement cannot be read: ${reading.why}`
  return { value: null, remarks: [remark(element, 'time-unclear', what, 'write it as 2026-03-02T09:00:00+01:00')] }
}

/** Every Parameter below the Categories of an element. */
const parametersIn = (element: Element | null): readonly Element[] =>
  (element?.children ?? []).flatMap((child) =>
    child.name === 'Parameter' ? [child] : child.name === 'Category' ? parametersIn(child) : [],
  )

/** SI units that parameters are asked in, by what the labels of the unit mean. */
const SI_OF_LABEL: ReadonlyMap<string, readonly [string, number]> = new Map(
  Object.entries({
    cm: ['m1', 0.01],
    mm: ['m1', 0.001],
    m: ['m1', 1],
    μm: ['m1', 1e-6],
    k: ['K1', 1],
    '°c': ['K1', 1],
    c: ['K1', 1],
  } as const),
)

interface Given {
  readonly pair: Pair
  readonly remark: Remark | null
}

/** A Parameter as words: `path length: 1 cm`. A unit whose label and SIUnits contradict each other is no unit. */
const givenBy = (parameter: Element): Given => {
  const value = parameter.children.find(({ name }) => name !== 'Unit')?.text.trim() ?? ''
  const name = plainWords(parameter.attributes.name ?? '')
  const unit = unitOf(parameter)
  const key = /^(?:sample |cell )?path ?length$/.test(name) ? 'path length' : name
  const plain: Given = { pair: { key, value, line: 0 }, remark: null }
  if (unit === null) return plain
  if (unit.kind === 'flaw')
    return { pair: { ...plain.pair, value: '' }, remark: remark(parameter, unit.code, unit.what, unit.remedy) }
  const expected = SI_OF_LABEL.get(plainWords(unit.label))
  const { si } = unit
  if (
    si !== null &&
    expected &&
    (si.dimension !== expected[0] || !si.factors.some((f) => Math.abs(f / expected[1] - 1) < 1e-6))
  ) {
    const what = `${name}: the label says ${unit.label}, the SIUnits say ${si.factors[0]} ${si.dimension || '(no unit)'}`
    return {
      pair: { ...plain.pair, value: '' },
      remark: remark(parameter, 'unit-contradiction', what, 'give the quantity a unit of its own'),
    }
  }
  return { pair: { ...plain.pair, value: `${value} ${unit.label}` }, remark: null }
}

const WANTED = new Set(['path', 'temperature', 'concentration', 'medium'])

/** Path length, temperature, concentration and all other parameters of the method, the result and the sample. */
export const parameterFacts = (
  holders: readonly (Element | null)[],
  file: string,
  lineOf: (offset: number) => number,
): {
  readonly facts: Facts
  readonly header: Readonly<Record<string, string>>
  readonly remarks: readonly Remark[]
} => {
  const given = holders.flatMap(parametersIn).map((parameter) => {
    const read = givenBy(parameter)
    return { ...read, pair: { ...read.pair, line: lineOf(parameter.offset) } }
  })
  const pairs = given.map(({ pair }) => pair)
  return {
    facts: factsOf(
      pairs.filter(({ key }) => WANTED.has(factOf(key) ?? '')),
      file,
    ),
    header: Object.fromEntries(
      pairs.filter(({ key, value }) => key !== '' && value !== '').map(({ key, value }) => [key, value]),
    ),
    remarks: given.flatMap((g) => (g.remark === null ? [] : [g.remark])),
  }
}
