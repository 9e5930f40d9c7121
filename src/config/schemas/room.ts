import { z } from 'zod'
import { address, clock, count, dailyTime, secret, text, word, zone } from '../pieces.ts'

const mail = z.strictObject({
  from: address().describe('Sender of the letters'),
  host: text().describe('Mail server'),
  port: count(65_535).describe('Its port: 465 with tls, 587 with starttls are usual'),
  security: word(['tls', 'starttls', 'none']).describe('none is refused off the loopback'),
  user: text().optional().describe('Name to log in with'),
  password: secret().optional().describe('Where the password is kept, never the password itself'),
})

const web = z.strictObject({
  listen: text().describe('ADDRESS:PORT, such as 127.0.0.1:8043'),
  token: secret().optional().describe('Demanded off the loopback'),
})

const quiet = z.strictObject({
  to: address().describe('Whose letters wait'),
  from: clock().describe('Beginning, by the clock of the room'),
  until: clock().describe('End; earlier than the beginning means on the next morning'),
})

/** `tendq.yaml` */
export const roomSchema = z.strictObject({
  room: text().describe('Name of the room, in every letter'),
  data: text().describe('Folder of the database; relative to this folder'),
  timezone: zone().describe('Zone in which files and letters give the time'),
  keeper: z.array(address()).min(1).describe('Who hears of the instruments and of unknown samples'),
  daily: dailyTime().prefault('07:00').describe("When the keeper's daily letter is written, or off"),
  quiet: z.array(quiet).prefault([]).describe('Hours in which letters wait, save those of high priority'),
  mail: mail.optional().describe('Without it no letter goes out'),
  web: web.optional(),
})

export type RoomFile = z.output<typeof roomSchema>
