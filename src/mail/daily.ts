import { type Block, command, listOf, paragraph, section } from './blocks.ts'
import { oneLine } from './plain.ts'
import type { DailyFacts, DigestFacts } from './types.ts'

const LISTED = 20

/** What the keeper reads every morning, also when all is well: that it comes is news too. */
export const dailySubject = ({ room, day, alarms, setAside, troubles }: DailyFacts): string => {
  const said = [
    ...(alarms.length > 0 ? [count(alarms.length, 'alarm stands', 'alarms stand')] : []),
    ...(setAside.length > 0 ? [count(setAside.length, 'file set aside', 'files set aside')] : []),
    ...(troubles.length > 0 ? [count(troubles.length, 'trouble', 'troubles')] : []),
  ]
  return `[${oneLine(room, 40)}] Daily letter ${oneLine(day, 12)}: ${said.length === 0 ? 'all is well' : said.join(', ')}`
}

export const dailyBlocks = (facts: DailyFacts): readonly Block[] => [
  paragraph(
    `What the room ${oneLine(facts.room)} did from ${oneLine(facts.since, 40)} until ${oneLine(facts.until, 40)}. This letter comes every day; when it does not, something is wrong.`,
  ),
  ...section('Taken in', [
    paragraph(
      `${count(facts.spectra, 'spectrum', 'spectra')} of ${count(facts.samples, 'sample', 'samples')}; ${count(facts.repeated, 'file', 'files')} with bytes that had come before; ${facts.pending} still to be analysed.`,
    ),
    ...listed(facts.instruments),
  ]),
  ...section('Troubles', listed(facts.troubles)),
  ...section('Alarms that stand', facts.alarms.length === 0 ? [paragraph('None.')] : listed(facts.alarms)),
  ...section('Standing for more than a day without acknowledgement', listed(facts.stale)),
  ...section('Rang three times or more', listed(facts.chattering)),
  ...section('Silent for a time', listed(facts.silent)),
  ...section('Set aside, with the reason', listed(facts.setAside)),
  ...section('Samples that no study claims, seen for the first time', listed(facts.unknownSamples)),
  ...section('Rules that could not decide', listed(facts.undecided)),
  ...section('Gathering a reference or history, no fault', listed(facts.gathering)),
  ...section('What people decided', listed(facts.decisions)),
  ...section('Letters', [
    paragraph(`${facts.letters.sent} sent, ${facts.letters.waiting} waiting, ${facts.letters.failed} given up.`),
  ]),
]

/** One letter in place of many. */
export const digestSubject = ({ room, letters }: DigestFacts): string =>
  `[${oneLine(room, 40)}] ${count(letters.length, 'letter', 'letters')} in one: many alarms at once, the first ${oneLine(letters[0]?.subject ?? '', 60)}`

export const digestBlocks = ({ room, letters, cautions }: DigestFacts): readonly Block[] => [
  paragraph(
    `More than ten alarms rang within ten minutes in the room ${oneLine(room)}. So many at once mostly have one cause: look at the instrument, the room and the drop folders before the samples. Each alarm stands by itself in \`tendq alarms\`.`,
  ),
  ...section('What rang', [{ kind: 'list', items: letters.map(({ subject }) => oneLine(subject, 300)) }]),
  ...section(
    'Cautions',
    [{ kind: 'list', items: cautions.map((caution) => oneLine(caution, 1000)) }].filter(
      ({ items }) => items.length > 0,
    ) as readonly Block[],
  ),
  ...section('Look at them', [command('tendq alarms'), command('tendq alarms show ID')]),
]

const count = (n: number, one: string, many: string): string => `${n} ${n === 1 ? one : many}`

const listed = (lines: readonly string[]): readonly Block[] => {
  const more = lines.length - LISTED
  return listOf([
    ...lines.slice(0, LISTED),
    ...(more > 0 ? [`and ${more} more: \`tendq status\` and \`tendq alarms\``] : []),
  ])
}
