import { DateTime } from 'luxon'
import { ruleCovers, speciesOf } from '../config/index.ts'
import type { Config, Instrument, RuleDefinition, Species, Study } from '../config/types.ts'
import { nmOfWavenumber } from '../spectrum/index.ts'

/** The configuration in words: what would be watched, fitted, judged and mailed. */
export const describe = (config: Config, notes: readonly string[]): readonly string[] => [
  `The configuration in ${config.folder} is right (sha256 ${config.sha256.slice(0, 12)}…).`,
  `Room ${config.room}: data in ${config.dataFolder}, times in ${config.timeZone}.`,
  ...section('Watched', config.instruments.flatMap(sayInstrument)),
  ...section(
    'Fitted',
    config.studies.flatMap((study) => sayStudy(config, study)),
  ),
  ...section(
    'Judged',
    config.rules.flatMap((rule) => sayRule(config, rule)),
  ),
  ...section('Mailed', sayMail(config)),
  ...section('Worth a look', notes),
]

const section = (title: string, lines: readonly string[]): readonly string[] =>
  lines.length === 0 ? [] : ['', title, ...lines.map((line) => `  ${line}`)]

const indented = (lines: readonly (string | null)[]): readonly string[] =>
  lines.filter((line) => line !== null).map((line) => `  ${line}`)

const sayInstrument = (instrument: Instrument): readonly string[] => {
  const { wavelength, reading } = instrument
  const said = Object.entries(reading).map(([key, value]) => `${key} ${value === '\t' ? 'tab' : value}`)
  return [
    `${instrument.name}, ${instrument.title}: files ${instrument.files} in ${instrument.dropFolder}`,
    ...indented([
      said.length === 0
        ? 'how a file is read is worked out from the file'
        : `read with ${said.join(', ')}; the rest is worked out`,
      saySample(instrument),
      `points above absorbance ${instrument.absorbanceLimit} are left out of the fit`,
      `wavelength known to ${wavelength.repeatabilityNm} nm between runs, ${wavelength.accuracyNm} nm absolutely, bandwidth ${wavelength.bandwidthNm} nm`,
      instrument.everyMs === null ? null : `overdue after ${sayTime(2 * instrument.everyMs)} without a spectrum`,
    ]),
  ]
}

const saySample = ({ sampleFrom, samplePattern }: Instrument): string =>
  sampleFrom === 'header'
    ? "the sample's name stands in the file's header"
    : `the sample's name is the ${sampleFrom === 'folder' ? "folder's name" : "file's name"}${samplePattern === null ? '' : `, as far as ${samplePattern} finds it`}`

const sayStudy = (config: Config, study: Study): readonly string[] => {
  const species = speciesOf(config, study)
  const samples = study.samples.map(({ name, control }) => `${name}${control ? ' (control)' : ''}`)
  return [
    `${study.name} (${study.kind}), ${study.title}: samples ${samples.join(', ')}`,
    ...indented([
      species === null ? `standard ${study.standard}` : saySpecies(species),
      species === null ? null : sayReference(study),
      saySchedule(study, config.timeZone),
      ...Object.entries(study.acceptance).map(
        ([name, { pass, look }]) =>
          `${name} must lie within ${sayRange(name, pass)}${look === null ? '' : `, and is worth a look outside ${sayRange(name, look)}`}`,
      ),
    ]),
  ]
}

const saySpecies = (species: Species): string => {
  const bands = species.bands.map(
    ({ role, nearPerCm, withinPerCm, shape, narrow }) =>
      `${role} near ${Math.round(nearPerCm)} ± ${Math.round(withinPerCm)} cm^-1 (${nmOfWavenumber(nearPerCm, 'air').toFixed(1)} nm)${shape === 'gaussian' ? '' : `, ${shape}`}${narrow ? ', narrow' : ''}`,
  )
  const spin = species.spin === null ? '' : ` ${species.spin}-spin`
  return `${species.title}, ${species.geometry}${spin} ${species.ion}: ${bands.length === 0 ? 'no bands expected' : bands.join(', ')}`
}

const sayReference = (study: Study): string =>
  `${sayComparison(study)}${study.approveReference === true ? ', once a person has approved it' : ''}`

const sayComparison = ({ reference }: Study): string => {
  switch (reference.kind) {
    case 'first':
      return `compared with the mean of the first ${reference.occasions} occasions, per sample and instrument`
    case 'sample':
      return `compared with sample ${reference.sample}`
    case 'values':
      return `compared with ${Object.entries(reference.values)
        .map(([name, [value, u]]) => `${name} = ${sayNumber(value)} ± ${sayNumber(u)}`)
        .join(', ')}`
  }
}

const saySchedule = ({ everyMs, scheduleMs, ends }: Study, zone: string): string | null => {
  const until = ends === null ? '' : ` until ${DateTime.fromMillis(ends, { zone }).toFormat('yyyy-LL-dd HH:mm')}`
  if (everyMs !== null) return `due every ${sayTime(everyMs)}${until}`
  return scheduleMs === null ? null : `due at the age of ${scheduleMs.map(sayTime).join(', ')}${until}`
}

const sayRange = (name: string, [low, high]: readonly [number, number]): string => {
  const range = `${sayNumber(low)} to ${sayNumber(high)}`
  if (!/^(nu|max)\d$/.test(name)) return range
  return `${range} cm^-1 (${nmOfWavenumber(high, 'air').toFixed(1)} to ${nmOfWavenumber(low, 'air').toFixed(1)} nm)`
}

const sayRule = (config: Config, rule: RuleDefinition): readonly string[] => {
  const studies = config.studies.filter(({ name }) => ruleCovers(rule, name)).map(({ name }) => name)
  const where = studies.length === config.studies.length ? 'all studies' : studies.join(', ')
  const times = rule.persist === 1 ? 'at once' : `after ${rule.persist} occasions in a row`
  return [
    `${rule.name} (${rule.priority}), ${rule.title}: ${rule.of}s of ${where}`,
    ...indented([
      `${sayCondition(rule)}; rings ${times}`,
      rule.condition.kind === 'expression' && rule.condition.clear !== null
        ? `clears when ${rule.condition.clear.text}`
        : null,
      rule.latch ? 'stays until a person resets it' : null,
    ]),
  ]
}

const ALWAYS = {
  unjudged: 'when spectra cannot be fitted or judged',
  'not-this-species': 'when a spectrum does not look like its compound at all',
  'common-change': 'when samples on one instrument move together',
} as const

const sayCondition = ({ condition }: RuleDefinition): string => {
  switch (condition.kind) {
    case 'expression':
      return `when ${condition.when.text}`
    case 'overdue':
      return `when nothing arrived for ${condition.times} times the interval`
    case 'always':
      return `${ALWAYS[condition.rule]} (always there)`
    case 'chart': {
      const { chart, quantity, k, h, lambda, l } = condition
      const figures =
        chart === 'cusum'
          ? `k ${k}, h ${h}`
          : chart === 'ewma'
            ? `lambda ${lambda}, limits ${l} sigma`
            : `limits ${l} sigma`
      return `when the ${chart} chart of ${quantity.text} leaves its limits (${figures})`
    }
  }
}

const sayMail = ({ mail, keeper, studies, dailyAt, quiet }: Config): readonly string[] => [
  mail === null
    ? 'no letters: no mail server is named'
    : `from ${mail.from} through ${mail.host}:${mail.port} (${mail.security})`,
  `the room's keeper: ${keeper.join(', ')}; ${dailyAt === null ? 'no daily letter' : `a daily letter at ${sayClock(dailyAt)}`}`,
  ...quiet.map(
    ({ to, from, until }) =>
      `${to}: letters wait from ${sayClock(from)} until ${sayClock(until)}, save those of high priority`,
  ),
  ...studies
    .filter(({ tell }) => tell.length > 0)
    .map(({ name, tell, escalate }) =>
      escalate === null
        ? `${name}: ${tell.join(', ')}`
        : `${name}: ${tell.join(', ')}; after ${sayTime(escalate.afterMs)} unacknowledged also ${escalate.to.join(', ')}`,
    ),
]

const sayClock = (minutes: number): string =>
  `${String(Math.floor(minutes / 60)).padStart(2, '0')}:${String(minutes % 60).padStart(2, '0')}`

const UNITS = [
  ['d', 86_400_000],
  ['h', 3_600_000],
  ['min', 60_000],
] as const

/** In the largest unit that divides it. */
const sayTime = (ms: number): string => {
  const [unit, size] = UNITS.find(([, size]) => ms % size === 0) ?? ['s', 1000]
  return `${ms / size} ${unit}`
}

const sayNumber = (value: number): string => String(Number(value.toPrecision(6)))
