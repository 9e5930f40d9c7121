import { createHash } from 'node:crypto'
import { composeLetter } from '../mail/index.ts'
import type { AlarmFacts, LetterFacts } from '../mail/types.ts'
import type { Stations } from './pipeline.ts'
import { messageOf } from './tell.ts'

/** Adds a letter to the people of the study, or to the room's keeper where there is none, or to `to`. Inside the outcome's transaction. */
export const addLetter = (facts: AlarmFacts, { store, room, now }: Stations, to?: readonly string[]): void => {
  const { config } = room()
  if (config.mail === null) return
  const study = config.studies.find(({ name }) => name === facts.study)
  const recipients = to ?? (study !== undefined && study.tell.length > 0 ? study.tell : config.keeper)
  if (recipients.length === 0) return
  write(facts, facts.alarm, recipients, { store, room, now })
}

/** Adds a letter that is about no single alarm, to these people. Returns its number; null where no mail is configured. */
export const addRoomLetter = (
  facts: LetterFacts,
  recipients: readonly string[],
  stations: Pick<Stations, 'store' | 'room' | 'now'>,
): number | null => (stations.room().config.mail === null ? null : write(facts, null, recipients, stations))

const write = (
  facts: LetterFacts,
  alarm: number | null,
  recipients: readonly string[],
  { store, room, now }: Pick<Stations, 'store' | 'room' | 'now'>,
): number => {
  const { dataFolder, mail } = room().config
  const at = now()
  const from = mail?.from ?? ''
  const domain = from.slice(from.lastIndexOf('@') + 1)
  const messageId = (letter: number, recipient: string): string => {
    const who = createHash('sha256').update(`${dataFolder}\n${letter}\n${recipient}`).digest('hex').slice(0, 20)
    return `<tendq.${letter}.${at.toString(36)}.${who}@${domain}>`
  }
  return store.letters.add({ alarm, facts, subject: composeLetter(facts).subject }, recipients, at, messageId)
}

/** Order of priorities, the most urgent highest. */
export const URGENCY = { high: 2, medium: 1, low: 0 } as const

/**
 * One spectrum often rings several rules for one cause. What rings (or returns) together for one subject goes into one
 * letter: that of the most urgent rule, which names the others.
 */
export const tellTogether = (told: readonly AlarmFacts[], stations: Stations): void => {
  for (const isReturn of [false, true]) {
    const [first, ...others] = told
      .filter(({ event }) => (event === 'returned') === isReturn)
      .toSorted((a, b) => URGENCY[b.priority] - URGENCY[a.priority] || a.alarm - b.alarm)
    if (first === undefined) continue
    addLetter(
      {
        ...first,
        also: others.map((other) => `${messageOf(other)} (alarm ${other.alarm})`),
        alsoAlarms: others.map(({ alarm }) => alarm),
      },
      stations,
    )
    for (const { alarm } of others)
      stations.store.alarms.event(alarm, stations.now(), 'told', 'tendq', `in the letter of alarm ${first.alarm}`)
  }
}

/** What rings together, a letter a subject. */
export const tellBySubject = (told: readonly AlarmFacts[], stations: Stations): void => {
  const subjectOf = ({ of, subject }: AlarmFacts): string => `${of} ${subject}`
  for (const subject of new Set(told.map(subjectOf)))
    tellTogether(
      told.filter((facts) => subjectOf(facts) === subject),
      stations,
    )
}
