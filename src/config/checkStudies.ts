import type { Fault } from '../fault.ts'
import { faultOfQuantity, readRange, readValue } from './acceptance.ts'
import { doubleNames, faultAt, unknownName } from './checks.ts'
import type { Part, Parts } from './parse.ts'
import type { Trouble } from './roles.ts'
import type { StudyFile } from './schemas/study.ts'
import { commonName, fits } from './wildcard.ts'
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

const faultOr = (part: Part<unknown>, steps: Path, code: string, trouble: Trouble | null): readonly Fault[] =>
  trouble === null ? [] : [faultAt(part, steps, code, trouble)]

const checkSubject = (part: Part<StudyFile>, parts: Parts): readonly Fault[] => {
  const { species, standard, kind } = part.value
  if (species === undefined && standard === undefined) {
    const remedy = kind === 'check' ? 'add `species:` or `standard:`' : 'add `species:`'
    return [faultAt(part, ['species'], 'missing-key', { what: 'the study says not what its samples are', remedy })]
  }
  if (species === undefined && kind !== 'check')
    return [faultAt(part, ['species'], 'missing-key', { what: 'species is missing', remedy: 'add `species:`' })]
  const known = parts.species.map(({ value }) => value.species)
  const standards = parts.standards.map(({ value }) => value.standard)
  return [
    ...(species === undefined
      ? []
      : faultOr(part, ['species'], 'unknown-species', unknownName('species', species, known, parts.clouded.species))),
    ...(standard === undefined
      ? []
      : faultOr(
          part,
          ['standard'],
          'unknown-standard',
          unknownName('standard', standard, standards, parts.clouded.standards),
        )),
    ...(standard !== undefined && kind !== 'check'
      ? [
          faultAt(part, ['standard'], 'standard', {
            what: `a ${kind} study has no standard`,
            remedy: 'delete the key, or write kind: check',
          }),
        ]
      : []),
  ]
}

const checkTimes = (part: Part<StudyFile>): readonly Fault[] => {
  const { began, ends, schedule, escalate, tell } = part.value
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
  if (escalate !== undefined && tell.length === 0)
    faults.push(
      faultAt(part, ['escalate'], 'escalation', {
        what: 'it escalates, but tells nobody first',
        remedy: 'add `tell:` with those who are to acknowledge',
      }),
    )
  return faults
}

const checkCriteria = (part: Part<StudyFile>): readonly Fault[] =>
  Object.entries(part.value.acceptance).flatMap(([name, { pass, look }]) => {
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

const checkReference = (part: Part<StudyFile>, parts: Parts): readonly Fault[] => {
  const { sample, values } = part.value.reference
  const faults = Object.entries(values ?? {}).flatMap(([name, pair]) => {
    const unknown = faultOfQuantity(name)
    if (unknown !== null) return [keyFault(part, ['reference', 'values'], name, unknown)]
    const reading = readValue(name, pair)
    return reading.kind === 'refused' ? [faultAt(part, ['reference', 'values', name], 'reference', reading)] : []
  })
  if (sample === undefined) return faults
  const owner = parts.studies.find(({ value }) => value.samples.some(({ name }) => fits(name, sample)))
  if (owner === undefined && parts.clouded.studies.length === 0)
    faults.push(
      faultAt(part, ['reference', 'sample'], 'reference', {
        what: `no study claims the sample ${sample}, so its spectra are never fitted`,
        remedy: 'list it among the samples of a study of this species',
      }),
    )
  if (owner !== undefined && owner.value.species !== part.value.species)
    faults.push(
      faultAt(part, ['reference', 'sample'], 'reference', {
        what: `${sample} belongs to ${owner.value.study}, which is of another species`,
        remedy: `compare with a sample of ${part.value.species ?? 'the same species'}`,
      }),
    )
  return faults
}

interface Claim {
  readonly part: Part<StudyFile>
  readonly index: number
  readonly name: string
}

/** Whether two patterns can claim one sample is decided exactly (`wildcard.ts`), with a name as proof. */
const doubleClaims = (studies: readonly Part<StudyFile>[]): readonly Fault[] => {
  const claims = studies.flatMap((part) => part.value.samples.map(({ name }, index): Claim => ({ part, index, name })))
  return claims.flatMap((claim, i) =>
    claims.slice(0, i).flatMap((earlier) => {
      if (earlier.part === claim.part && earlier.name !== claim.name) return []
      const shared = commonName(earlier.name, claim.name)
      return shared === null ? [] : [claimFault(claim, earlier, shared)]
    }),
  )
}

const claimFault = ({ part, index, name }: Claim, earlier: Claim, shared: string): Fault => {
  const { at, line } = earlier.part.document.placeOf(['samples', earlier.index, 'name'])
  const both = earlier.name === name ? `${name} is claimed` : `${name} and ${earlier.name} both claim ${shared}:`
  return faultAt(part, ['samples', index, 'name'], 'double-claim', {
    what: `${both} by study ${earlier.part.value.study} (${at}, line ${line}) too`.replace(': by', ', the latter in'),
    remedy: 'a sample belongs to one study: make the names or wildcards exclude each other',
  })
}
