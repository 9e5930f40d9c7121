/** AnIML (ASTM E13.15), core 0.90 and 1.0, technique UV/Vis. */
import type { Fault } from '../fault.ts'
import { parameterFacts, sampleOf, timestampOf } from './animlFacts.ts'
import { type Curve, curvesOf } from './animlSeries.ts'
import type { UnitFlaw } from './animlUnits.ts'
import { childOf, childrenOf, type Element, type Flaw, parseXml, placesOf } from './animlXml.ts'
import { axisFault, gapWarnings } from './axis.ts'
import { settleYaml } from './settle.ts'
import { decodeText } from './text.ts'
import type { RawSpectrum, Reader, Reading, ReadingHints } from './types.ts'

const FORMAT = 'AnIML'
const NAMESPACE = /^urn:org:astm:animl:schema:core:(?:draft:)?(0\.90|1\.0)$/
const ROOT = /<(?:[\w.-]+:)?AnIML(?=[\s>/])|<!DOCTYPE\s+(?:[\w.-]+:)?AnIML\b/

/** What a file is read with: where offsets lie, what was said of it, what has been found so far. */
interface Desk {
  readonly file: string
  readonly root: Element
  readonly hints: ReadingHints
  readonly faultOf: (flaw: UnitFlaw) => Fault
  readonly spectra: RawSpectrum[]
  readonly forms: Set<string>
  readonly faults: Fault[]
  readonly settle: ReadingHints[]
  readonly warnings: Fault[]
}

/** Reads AnIML documents: every UV/Vis spectrum of every experiment step. */
export const animl: Reader = {
  format: FORMAT,
  confidence: (bytes) => {
    if (!bytes.includes(0x3c)) return 0 // no `<` in any encoding
    const decoded = decodeText(bytes)
    const head = decoded.kind === 'text' ? decoded.text.slice(0, 65_536) : ''
    const root = /^\s*</.test(head) ? ROOT.exec(head) : null
    if (root === null) return 0
    return head.includes('urn:org:astm:animl:schema:core', root.index) ? 1 : 0.8
  },
  read: (bytes, file, hints) => {
    const decoded = textIn(bytes)
    if (decoded.kind === 'bad')
      return refused(
        [{ code: decoded.code, place: { at: file }, what: decoded.what, remedy: 'export it again, in UTF-8' }],
        [],
        [],
      )
    const places = placesOf(decoded.text)
    const faultOf = ({ code, offset, what, remedy }: UnitFlaw): Fault => ({
      code,
      place: { at: file, ...places(offset) },
      what,
      remedy,
    })
    const parsed = parseXml(decoded.text)
    if (parsed.kind === 'flaw') return refused([faultOf(parsed)], [], [])
    const version = versionOf(parsed.root, parsed.namespace)
    if (typeof version !== 'string') return refused([faultOf(version)], [], [])
    const desk: Desk = {
      file,
      root: parsed.root,
      hints,
      faultOf,
      spectra: [],
      forms: new Set(),
      faults: [],
      settle: [],
      warnings: [],
    }
    for (const set of childrenOf(parsed.root, 'ExperimentStepSet')) readSteps(set, desk)
    return outcome(desk, version, decoded.encoding)
  },
}

const refused = (
  faults: readonly [Fault, ...Fault[]],
  settle: readonly string[],
  spectra: readonly RawSpectrum[],
): Reading => ({
  kind: 'refused',
  format: FORMAT,
  faults,
  settle,
  spectra,
})

type TextIn =
  | { readonly kind: 'text'; readonly text: string; readonly encoding: string }
  | { readonly kind: 'bad'; readonly code: string; readonly what: string }

/** The text in the encoding that the XML declaration names; without one XML is UTF-8, or UTF-16 with its mark. */
const textIn = (bytes: Uint8Array): TextIn => {
  const decoded = decodeText(bytes)
  if (decoded.kind === 'binary') return { kind: 'bad', code: 'not-text', what: `this is no text: ${decoded.why}` }
  const { text, encoding } = decoded
  const declared = /^<\?xml[^>]*?\bencoding\s*=\s*["']([^"'<>]*)["']/.exec(text)?.[1]?.toLowerCase() ?? 'utf-8'
  const western = /^(?:iso-8859-1|latin-?1|windows-1252|cp1252)$/.test(declared)
  if (!western && !/^(?:utf-?8|utf-?16(?:le|be)?|us-ascii|ascii)$/.test(declared))
    return { kind: 'bad', code: 'encoding', what: `the encoding ${declared} is not read` }
  if (encoding.startsWith('UTF-16')) return { kind: 'text', text, encoding }
  if (western) return { kind: 'text', text: new TextDecoder('windows-1252').decode(bytes), encoding: 'Windows-1252' }
  if (encoding === 'UTF-8') return { kind: 'text', text, encoding }
  return { kind: 'bad', code: 'encoding', what: `it says to be in ${declared}, and its bytes are not` }
}

/** `0.90` or `1.0`, by the namespace; where there is none, by the attribute. */
const versionOf = (root: Element, namespace: string): string | Flaw => {
  const said = root.attributes.version?.trim() ?? null
  const version = namespace === '' ? said : (NAMESPACE.exec(namespace)?.[1] ?? null)
  const flaw = (what: string): Flaw => ({
    kind: 'flaw',
    code: 'unknown-version',
    offset: root.offset,
    what,
    remedy: 'export it as AnIML 0.90 or 1.0',
  })
  if (root.name !== 'AnIML') return flaw(`the root element is ${root.name}, not AnIML`)
  if (version === null || !/^(?:0\.90|1\.0)$/.test(version))
    return flaw(`the namespace "${namespace}"${said === null ? '' : ` of version ${said}`} is none that is read here`)
  if (said !== null && said !== version)
    return flaw(`the namespace is of version ${version}, the attribute says ${said}`)
  return version
}

const outcome = (desk: Desk, version: string, encoding: string): Reading => {
  const { spectra, forms, faults, warnings, faultOf, root } = desk
  const settle = [...new Set(desk.settle.map(settleYaml))]
  const [first, ...others] = faults
  if (first) return refused([first, ...others], settle, spectra)
  const passed = warnings[0]
  if (spectra.length > 0) {
    const dialect = `${[...forms].join('; ')}, ${encoding}, ${spectra.length === 1 ? 'one spectrum' : `${spectra.length} spectra`}`
    return { kind: 'read', format: `${FORMAT} ${version}`, dialect, spectra, warnings }
  }
  if (passed) return refused([{ ...passed, remedy: 'export the UV/Vis spectra' }, ...warnings.slice(1)], [], [])
  const none: Flaw = {
    kind: 'flaw',
    code: 'no-spectrum',
    offset: root.offset,
    what: 'no experiment step holds a SeriesSet',
    remedy: 'export it with its results',
  }
  return refused([faultOf(none)], [], [])
}

const complain = (flaw: UnitFlaw, desk: Desk): void => {
  desk.faults.push(desk.faultOf(flaw))
  desk.settle.push(...(flaw.settle ?? []))
}

const readSteps = (set: Element, desk: Desk): void => {
  for (const step of childrenOf(set, 'ExperimentStep')) {
    readStep(step, desk)
    for (const result of childrenOf(step, 'Result'))
      for (const inner of childrenOf(result, 'ExperimentStepSet')) readSteps(inner, desk)
  }
}

const isUvVis = ({ attributes }: Element): boolean => {
  const name = (attributes.name ?? '').toLowerCase().replace(/[^a-z]/g, '')
  return /^(?:uvvis(?:ible)?|ultravioletvisible)(?:spectroscopy|spectrometry|spectrophotometry)?$/.test(name)
}

const passing = (at: Element, code: string, what: string, remedy: string): Flaw => ({
  kind: 'flaw',
  code,
  offset: at.offset,
  what,
  remedy,
})

const NO_SAMPLE_SPECTRUM = /peak|baseline|background|dark|blank|reference/i

const readStep = (step: Element, desk: Desk): void => {
  const results = childrenOf(step, 'Result').filter((result) => childOf(result, 'SeriesSet') !== null)
  if (results.length === 0) return
  const technique = childOf(step, 'Technique')
  if (technique === null) {
    const what = `step "${step.attributes.name ?? ''}" does not name its technique`
    complain(passing(step, 'no-technique', what, 'export the file again'), desk)
    return
  }
  if (!isUvVis(technique)) {
    const what = `step "${step.attributes.name ?? ''}" is of technique ${technique.attributes.name ?? '(no name)'} and was passed over`
    desk.warnings.push(
      desk.faultOf(passing(technique, 'other-technique', what, 'nothing, if it is no UV/Vis spectrum')),
    )
    return
  }
  for (const result of results) for (const set of childrenOf(result, 'SeriesSet')) readSet(step, result, set, desk)
}

const readSet = (step: Element, result: Element, set: Element, desk: Desk): void => {
  const names = `${result.attributes.name ?? ''} ${set.attributes.name ?? ''}`
  if (NO_SAMPLE_SPECTRUM.test(names)) {
    const what = `result "${names.trim()}" is no spectrum of a sample and was passed over`
    desk.warnings.push(desk.faultOf(passing(result, 'not-a-spectrum', what, 'name it "Spectrum" if it is one')))
    return
  }
  const { curves, flaws, passed } = curvesOf(set, desk.hints)
  for (const flaw of flaws) complain(flaw, desk)
  desk.warnings.push(...passed.map(desk.faultOf))
  for (const curve of curves) {
    const placeOf = (i: number) => desk.faultOf(passing({ ...set, offset: curve.offsetOf(i) }, '', '', '')).place
    const fault = axisFault(curve.x, curve.y, curve.xUnit, placeOf)
    const gaps = gapWarnings(curve.x, curve.xUnit, placeOf)
    // an axis that turns back or repeats itself is said here, and dealt with where spectra are prepared
    if (fault === null || fault.code === 'axis-order')
      keep(step, result, curve, [...(fault === null ? [] : [fault]), ...gaps], desk)
    else desk.faults.push(fault)
  }
}

const keep = (step: Element, result: Element, curve: Curve, warnings: readonly Fault[], desk: Desk): void => {
  const sample = sampleOf(desk.root, step)
  const time = timestampOf(step)
  const lineOf = (offset: number) => desk.faultOf(passing({ ...step, offset }, '', '', '')).place.line ?? 1
  const { facts, header, remarks } = parameterFacts([childOf(step, 'Method'), result, sample.value], desk.file, lineOf)
  desk.forms.add(curve.forms)
  desk.spectra.push({
    index: desk.spectra.length,
    x: curve.x.slice(),
    y: curve.y,
    xUnit: curve.xUnit,
    medium: curve.xUnit === 'nm' || curve.xUnit === 'um' ? (desk.hints.medium ?? facts.medium) : null,
    yKind: curve.yKind,
    sample: sample.value?.attributes.name?.trim() || null,
    title: step.attributes.name?.trim() || null,
    time: time.value,
    pathMm: facts.pathMm,
    temperatureC: facts.temperatureC,
    concentrationMolPerL: facts.concentrationMolPerL,
    header: { ...header, step: step.attributes.name ?? '', result: result.attributes.name ?? '', series: curve.name },
    warnings: [
      ...[...curve.remarks, ...sample.remarks, ...time.remarks, ...remarks].map(desk.faultOf),
      ...facts.warnings,
      ...warnings,
    ],
  })
}
