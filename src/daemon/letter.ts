import { createHash } from 'node:crypto'
import { composeLetter } from '../mail/index.ts'
import type { AlarmFacts } from '../mail/types.ts'
import type { Stations } from './pipeline.ts'

/** Adds a letter to the people of the study, or to the room's keeper where there is none, or to `to`. Inside the outcome's transaction. */
export const addLetter = (facts: AlarmFacts, { store, room, now }: Stations, to?: readonly string[]): void => {
  const { config } = room()
  if (config.mail === null) return
  const study = config.studies.find(({ name }) => name === facts.study)
  const recipients = to ?? (study !== undefined && study.tell.length > 0 ? study.tell : config.keeper)
  if (recipients.length === 0) return
  const at = now()
  const domain = config.mail.from.slice(config.mail.from.lastIndexOf('@') + 1)
  const messageId = (letter: number, recipient: string): string => {
    const who = createHash('sha256').update(`${config.dataFolder}\n${letter}\n${recipient}`).digest('hex').slice(0, 20)
    return `<tendq.${letter}.${at.toString(36)}.${who}@${domain}>`
  }
  store.letters.add({ alarm: facts.alarm, facts, subject: composeLetter(facts).subject }, recipients, at, messageId)
}
