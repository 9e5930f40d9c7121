import { DateTime } from 'luxon'
import { cautionsFor } from '../chemistry/cautions.ts'
import { COMMON, labelOf, sayMeasured } from '../mail/figures.ts'
import type { AlarmFacts } from '../mail/types.ts'
import type { CompiledRule, Evidence } from '../rules/types.ts'
import { type CommonPart, causeOfCommon, type SampleDepartures, scaleOf } from '../series/commonChange.ts'
import type { CommonChange } from './commonChange.ts'
import type { JustKept } from './judge.ts'
import { addLetter } from './letter.ts'
import type { Stations } from './pipeline.ts'
import { ruleText, type UntoldFacts } from './tell.ts'

/** What the letter about a common change says. */
export const commonFacts = (
  { definition }: CompiledRule,
  { subject, identity, arrival }: JustKept,
  { key, parts, samples }: CommonChange,
  { room }: Stations,
): UntoldFacts => {
  const { config, studyOf } = room()
  const cause = causeOfCommon(parts)
  const inZone = (ms: number): string => DateTime.fromMillis(ms, { zone: config.timeZone }).toISO() ?? ''
  const species = new Set(
    samples.flatMap(({ sample }) => config.species.find(({ name }) => name === studyOf(sample)?.species) ?? []),
  )
  return {
    kind: 'alarm',
    room: config.room,
    rule: definition.name,
    ruleTitle: definition.title,
    ruleText: ruleText(definition),
    priority: definition.priority,
    of: key.of,
    subject: key.subject,
    study: null,
    species: null,
    speciesTitle: null,
    instrument: subject.instrument.name,
    measuredAt: inZone(identity.measuredAt),
    since: null,
    spectra: 0,
    evidence: parts.map(evidenceOf),
    parameters: [],
    diagnosis: cause.diagnosis,
    confidence: null,
    meaning: `${cause.evidence} ${whoTold(parts)}`,
    check: CHECKS[cause.diagnosis],
    cautions: [...new Set([...species].flatMap((one) => cautionsFor(one, cause.diagnosis)))],
    file: arrival.file,
    samples: samples.map((one) => sayOf(one, parts)),
  }
}

const whoTold = (parts: readonly CommonPart[]): string =>
  parts.some(({ byControls }) => byControls)
    ? 'The control samples tell what is common.'
    : 'No control sample was measured with them: samples that change alike by their own chemistry look the same.'

const unitOf = (quantity: string): string =>
  scaleOf(quantity) === 'nm' ? 'nm' : /^[bc]$/.test(quantity) ? 'cm^-1' : '1'

/** Of a height or a width the change of its logarithm, which is the relative change while it is small. */
const nameOf = (quantity: string): string => `${COMMON}${scaleOf(quantity) === 'log' ? `ln ${quantity}` : quantity}`

const evidenceOf = ({ quantity, c, u }: CommonPart): Evidence => ({
  name: nameOf(quantity),
  unit: unitOf(quantity),
  value: c,
  u,
  reference: 0,
  uReference: null,
})

const sayOf = ({ sample, control, departures }: SampleDepartures, parts: readonly CommonPart[]): string => {
  const moved = parts.slice(0, 2).flatMap(({ quantity }) => {
    const found = departures[quantity]
    return found === undefined ? [] : [`${labelOf(quantity)} ${sayMeasured(found[0], found[1], unitOf(quantity))}`]
  })
  const along = parts.some(({ together }) => together.includes(sample))
  return `${sample}${control ? ' (control)' : ''}: ${moved.join(', ')}${along ? '' : ', not with the others'}`
}

const CHECKS = {
  wavelength: [
    'Run the wavelength check of the instrument (holmium or another certified standard).',
    'Ask whether lamp, slit, cell holder or settings were changed.',
    'Until it is mended, do not take what this instrument says of any sample for chemistry.',
  ],
  temperature: [
    'Measure the temperature in the cell, and compare with what the study planned.',
    'See whether thermostat, room or waiting time before the measurement changed.',
  ],
  optics: [
    'Measure the blank again, with a clean cell.',
    'Look for fingerprints, bubbles and drops on the windows.',
    'See how old the lamp is, and whether the cells are those that were used before.',
  ],
  unclear: [
    'Measure a control or a freshly made sample on the same instrument.',
    'Run the wavelength check of the instrument, and look at the temperature in the cell.',
    'Compare with what the samples have in common: batch, solvent, store, light, the day they were made.',
  ],
} as const

/** One letter to the keeper and to the people of every study whose samples went along. */
export const tellCommonChange = (facts: AlarmFacts, samples: readonly SampleDepartures[], stations: Stations): void => {
  const { store, room } = stations
  const { config, studyOf } = room()
  const people = samples.flatMap(({ sample }) => studyOf(sample)?.tell ?? [])
  const raisedAt = store.alarms.get(facts.alarm)?.raisedAt ?? 0
  const silenced = [...new Set(store.alarms.notes(facts.alarm, 'suppresses', raisedAt))]
  addLetter({ ...facts, silenced }, stations, [...config.keeper, ...people])
}
