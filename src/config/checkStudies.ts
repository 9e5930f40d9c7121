import type { Fault } from '../fault.ts'
import { faultOfQuantity, readRange, readValue } from './acceptance.ts'
import { doubleNames, faultAt, namesOf, unknownName } from './checks.ts'
import type { FilePart, Part, Parts } from './parse.ts'
import type { Trouble } from './roles.ts'
import type { StudyFile } from './schemas/study.ts'
import { commonName, fits, hasWildcard } from './wildcard.ts'
import type { Path } from './yamlDocument.ts'

/** What studies refer to, their criteria, and that no sample belongs to two of them. */
export const checkStudies = (parts: Parts): readonly Fault[] => [
  ...doubleNames(parts.studies, 'study'),
  ...parts.studies.flatMap((part) => [
    ...checkSubject(part, parts),
    ...checkTimes(part),
    ...checkCriteria(part),
    ...checkReference(part, parts),
  ]),
  ...doubleClaims(parts.studies),
]

const checkSubject = (part: FilePart<StudyFile>, parts: Parts): readonly Fault[] => {
  const { species, standard, kind } = part.value
  const told = (key: 'species' | 'standard' | 'kind') => part.value[key] !== undefined || part.damaged.includes(key)
  if (!told('species') && kind !== undefined && (kind !== 'check' || !told('standard'))) {
    const remedy = kind === 'check' ? 'add `species:` or `standard:`' : 'add `species:`'
    return [faultAt(part, ['species'], 'missing-key', { what: 'the study says not what its samples are', remedy })]
  }
  const found = (key: 'species' | 'standard', trouble: Trouble | null) =>
    trouble === null ? [] : [faultAt(part, [key], `unknown-${key}`, trouble)]
  const known = namesOf(parts.species, 'species')
  const standards = namesOf(parts.standards, 'standard')
  const { clouded } = parts
  return [
    ...(species === undefined ? [] : found('species', unknownName('species', species, known, clouded.has('species')))),
    ...(standard === undefined
      ? []
      : found('standard', unknownName('standard', standard, standards, clouded.has('standards')))),
    ...(standard !== undefined && kind !== undefined && kind !== 'check'
      ? [faultAt(part, ['standard'], 'standard', strayStandard(kind))]
      : []),
  ]
}

const strayStandard = (kind: string): Trouble => ({
  what: `a ${kind} study has no standard`,
  remedy: 'delete the key, or write kind: check',
})

const checkTimes = (part: FilePart<StudyFile>): readonly Fault[] => {
  const { began, ends, schedule, escalate, tell = [] } = part.value
  const faults: Fault[] = []
  if (began !== undefined && ends !== undefined && ends <= began)
    faults.push(
      faultAt(part, ['ends'], 'study-times', { what: 'the study ends before it began', remedy: 'mend one of them' }),
    )
  if (Array.isArray(schedule)) {
    const late = schedule.findIndex((ms, i) => i > 0 && ms <= schedule[i - 1]!)
    if (late > 0)
      faults.push(
        faultAt(part, ['schedule', late], 'schedule', { what: 'the ages do not ascend', remedy: 'order them' }),
      )
  }
  if (escalate !== undefined && tell.length === 0 && !part.damaged.includes('tell'))
    faults.push(
      faultAt(part, ['escalate'], 'escalation', {
        what: 'it escalates, but tells nobody first',
        remedy: 'add `tell:` with those who are to acknowledge',
      }),
    )
  return faults
}

const checkCriteria = (part: FilePart<StudyFile>): readonly Fault[] =>
  Object.entries(part.value.acceptance ?? {}).flatMap(([name, { pass, look }]) => {
    const unknown = faultOfQuantity(name)
    if (unknown !== null) return [keyFault(part, ['acceptance'], name, unknown)]
    const outer = readRange(name, pass)
    const inner = look === undefined ? null : readRange(name, look)
    const steps = ['acceptance', name]
    const faults = [
      ...(outer.kind === 'refused' ? [faultAt(part, [...steps, 'pass'], 'criterion', outer)] : []),
      ...(inner?.kind === 'refused' ? [faultAt(part, [...steps, 'look'], 'criterion', inner)] : []),
    ]
    if (outer.kind === 'read' && inner?.kind === 'read' && !holds(outer.value, inner.value))
      faults.push(
        faultAt(part, [...steps, 'look'], 'criterion', {
          what: 'the range of look reaches beyond that of pass',
          remedy: 'look is the inner range: outside it, but inside pass, somebody should have a look',
        }),
      )
    return faults
  })

const holds = (outer: readonly [number, number], inner: readonly [number, number]): boolean =>
  outer[0] <= inner[0] && inner[1] <= outer[1]

const keyFault = (part: Part<unknown>, steps: Path, key: string, { what, remedy }: Trouble): Fault => ({
  code: 'unknown-quantity',
  place: part.document.placeOfKey([...part.path, ...steps], key),
  what,
  remedy,
})

const checkReference = (part: FilePart<StudyFile>, parts: Parts): readonly Fault[] => {
  const { sample, values } = part.value.reference ?? {}
  const faults = Object.entries(values ?? {}).flatMap(([name, pair]) => {
    const unknown = faultOfQuantity(name)
    if (unknown !== null) return [keyFault(part, ['reference', 'values'], name, unknown)]
    const reading = readValue(name, pair)
    return reading.kind === 'refused' ? [faultAt(part, ['reference', 'values', name], 'reference', reading)] : []
  })
  if (sample === undefined) return faults
  const owner = parts.studies.find(({ value }) => value.samples?.some(({ name }) => fits(name, sample)))
  const certain = parts.studies.every(({ damaged }) => !damaged.includes('samples')) && !parts.clouded.has('studies')
  if (owner === undefined && certain)
    faults.push(
      faultAt(part, ['reference', 'sample'], 'reference', {
        what: `no study claims the sample ${sample}, so its spectra are never fitted`,
        remedy: 'list it among the samples of a study of this species',
      }),
    )
  const [own, other] = [part.value.species, owner?.value.species]
  if (own !== undefined && other !== undefined && own !== other)
    faults.push(
      faultAt(part, ['reference', 'sample'], 'reference', {
        what: `${sample} belongs to ${owner?.value.study ?? 'a study'}, which is of another species`,
        remedy: `compare with a sample of ${own}`,
      }),
    )
  return faults
}

interface Claim {
  readonly part: FilePart<StudyFile>
  readonly index: number
  readonly name: string
}

/** Whether two patterns can claim one sample is decided exactly (`wildcard.ts`), with a name as proof. */
const doubleClaims = (studies: readonly FilePart<StudyFile>[]): readonly Fault[] => {
  const claims = studies.flatMap((part) =>
    (part.value.samples ?? []).map(({ name }, index): Claim => ({ part, index, name })),
  )
  return claims.flatMap((claim, i) =>
    claims.slice(0, i).flatMap((earlier) => {
      // in one study an exact name beside a wildcard sets its `control` apart
      if (earlier.part === claim.part && earlier.name !== claim.name) return []
      const shared = sharedName(earlier.name, claim.name)
      return shared === null ? [] : [claimFault(claim, earlier, shared)]
    }),
  )
}

const sharedName = (a: string, b: string): string | null =>
  hasWildcard(a) || hasWildcard(b) ? commonName(a, b) : a === b ? a : null

const claimFault = ({ part, index, name }: Claim, earlier: Claim, shared: string): Fault => {
  const { at, line } = earlier.part.document.placeOf(['samples', earlier.index, 'name'])
  const where = `study ${earlier.part.value.study ?? '?'} (${at}, line ${line})`
  const what =
    earlier.name === name
      ? `${name} stands in ${where} already`
      : `a sample ${shared} would belong here by "${name}" and to ${where} by "${earlier.name}"`
  return faultAt(part, ['samples', index, 'name'], 'double-claim', {
    what,
    remedy: 'a sample belongs to one study: make the names or wildcards exclude each other',
  })
}
