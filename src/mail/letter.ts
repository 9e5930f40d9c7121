import { type Block, command, listOf, paragraph, printHtml, printText, section } from './blocks.ts'
import { dailyBlocks, dailySubject, digestBlocks, digestSubject } from './daily.ts'
import { figureRow, labelOf, sayChange } from './figures.ts'
import { oneLine } from './plain.ts'
import type { AlarmFacts, LetterFacts, LetterPicture, LetterText, TestFacts } from './types.ts'

const NO_SAFETY_SYSTEM =
  'tendq is no certified safety system: do not rely on it where a missed or late letter could hurt someone. Local rules, the safety data sheet and licensed practice come first.'

/** What is written, in a letter, from the facts frozen when the alarm changed. Pure; says nothing the facts do not hold. */
export const composeLetter = (facts: LetterFacts, picture: LetterPicture | null = null): LetterText => {
  switch (facts.kind) {
    case 'test':
      return composeTest(facts)
    case 'daily':
      return letter(dailySubject(facts), [...dailyBlocks(facts), paragraph(NO_SAFETY_SYSTEM)])
    case 'digest':
      return letter(digestSubject(facts), [...digestBlocks(facts), paragraph(NO_SAFETY_SYSTEM)])
    case 'alarm':
      return {
        ...letter(subjectLine(facts), alarmBlocks(facts, picture)),
        ...(picture?.kind === 'drawn' ? { picture } : {}),
      }
  }
}

const letter = (subject: string, blocks: readonly Block[]): LetterText => ({
  subject: oneLine(subject, 180),
  text: printText(blocks),
  html: printHtml(oneLine(subject, 180), blocks),
})

const composeTest = ({ room, at }: TestFacts): LetterText =>
  letter(`[${oneLine(room, 40)}] Test letter`, [
    paragraph(`This is a test letter from the room ${oneLine(room)}, written at ${oneLine(at)}.`),
    paragraph('Letters about alarms will come this way. Nothing needs to be done.'),
    paragraph(NO_SAFETY_SYSTEM),
  ])

const EVENT = {
  raised: '',
  returned: 'back to normal: ',
  're-alarmed': 'still in alarm: ',
  suppressed: 'explained by a common change: ',
} as const
const PRIORITY = { high: 'High', medium: 'Medium', low: 'Low' } as const

/** Sample, what, how much: enough to decide from the list of letters whether to open this one. */
const subjectLine = (facts: AlarmFacts): string => {
  const moved = facts.evidence.find((evidence) => sayChange(evidence) !== null)
  const howMuch = moved === undefined ? '' : `, ${labelOf(moved.name)} ${sayChange(moved)}`
  const what = `${EVENT[facts.event]}${oneLine(facts.ruleTitle, 60)}`
  return `[${oneLine(facts.room, 40)}] ${oneLine(facts.subject, 50)}: ${what}${howMuch}`
}

const alarmBlocks = (facts: AlarmFacts, picture: LetterPicture | null): readonly Block[] => [
  paragraph(openingOf(facts)),
  ...section('What moved', [...figuresOf(facts), ...pictureOf(picture)]),
  ...section('Which', [{ kind: 'list', items: whichOf(facts) }]),
  ...section('Rule', [
    paragraph(`${oneLine(facts.ruleTitle)} (${oneLine(facts.rule, 80)}). It rings when this holds:`),
    command(oneLine(facts.ruleText, 1000)),
  ]),
  ...section('At the same time', listOf(facts.also ?? [])),
  ...section('Samples', listOf(facts.samples ?? [])),
  ...section('Silent because of this alarm', silencedOf(facts)),
  ...section('Likely cause', causeOf(facts)),
  ...section('Check first', listOf(facts.check)),
  ...section('Cautions', listOf(facts.cautions)),
  ...section('Acknowledge', [
    paragraph('To say that you have seen this alarm (not that it is mended), on the machine that runs tendq:'),
    command(`tendq alarms acknowledge ${facts.alarm} --by WHO --note TEXT`),
  ]),
  ...section('Note', [paragraph(NO_SAFETY_SYSTEM)]),
]

const openingOf = ({ event, of, subject, ruleTitle, priority, spectra, since, explainedBy }: AlarmFacts): string => {
  const name = `${of} ${oneLine(subject, 120)}`
  const title = oneLine(ruleTitle, 120)
  const from = since === null ? '' : ` since ${oneLine(since, 60)}`
  const seen = spectra > 0 ? `, on ${spectra} ${spectra === 1 ? 'occasion' : 'occasions in a row'}` : ''
  switch (event) {
    case 'raised':
      return `${PRIORITY[priority]} priority. For the ${name} the rule “${title}” rings${from}${seen}.`
    case 're-alarmed':
      return `${PRIORITY[priority]} priority. For the ${name} the rule “${title}” still rings${from}${seen}.`
    case 'suppressed':
      return `You had a letter about the ${name}: “${title}”. What it told is explained by ${oneLine(explainedBy ?? 'another alarm', 200)}. The alarm is suppressed by design until that is over, and rings again should the ${of} depart from the others.`
    case 'returned':
      return `For the ${name} the rule “${title}” no longer rings. An alarm that nobody has acknowledged stays on the list until someone does.`
  }
}

const pictureOf = (picture: LetterPicture | null): readonly Block[] => {
  if (picture === null) return []
  if (picture.kind === 'failed')
    return [paragraph('The picture of the trend could not be drawn; `tendq history` has its figures.')]
  return [{ kind: 'picture', cid: picture.cid, alt: oneLine(picture.alt, 600), widthPx: picture.widthPx }]
}

const silencedOf = ({ silenced = [] }: AlarmFacts): readonly Block[] =>
  silenced.length === 0
    ? []
    : [
        paragraph(
          'These alarms tell no more than this one and are suppressed by design. One that departs rings by itself.',
        ),
        ...listOf(silenced),
      ]

const figuresOf = ({ evidence, parameters }: AlarmFacts): readonly Block[] => {
  const told = new Set(evidence.map(({ name }) => name))
  const rows = [...evidence, ...parameters.filter(({ name }) => !told.has(name))].map(figureRow)
  if (rows.length === 0) return []
  return [
    { kind: 'figures', rows },
    paragraph('After ± stands the standard uncertainty (k = 1); that of a change combines both sides.'),
  ]
}

const whichOf = (facts: AlarmFacts): readonly string[] => {
  const entries: readonly (readonly [string, string | null])[] = [
    ['Room', facts.room],
    ['Study', facts.study],
    ['Compound', facts.speciesTitle ?? facts.species],
    ['Instrument', facts.instrument],
    ['Measured at', facts.measuredAt],
    ['File', facts.file],
    ['Alarm', String(facts.alarm)],
  ]
  return entries.flatMap(([label, value]) => (value === null ? [] : [`${label}: ${oneLine(value)}`]))
}

const causeOf = ({ diagnosis, confidence, meaning }: AlarmFacts): readonly Block[] => {
  const sure =
    confidence === null
      ? 'no probability has been worked out for it'
      : `posterior probability ${Math.round(confidence * 100)} %`
  return [
    paragraph(`${oneLine(diagnosis, 60)} (${sure}).`),
    ...(meaning === '' ? [] : [paragraph(oneLine(meaning, 2000))]),
  ]
}
