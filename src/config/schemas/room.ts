import { z } from 'zod'
import { address, count, secret, text, word, zone } from '../pieces.ts'

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

/** `tendq.yaml` */
export const roomSchema = z.strictObject({
  room: text().describe('Name of the room, in every letter'),
  data: text().describe('Folder of the database; relative to this folder'),
  timezone: zone().describe('Zone in which files and letters give the time'),
  keeper: z.array(address()).min(1).describe('Who hears of the instruments and of unknown samples'),
  mail: mail.optional().describe('Without it no letter goes out'),
  web: web.optional(),
})

export type RoomFile = z.output<typeof roomSchema>
