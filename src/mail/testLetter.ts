import { randomUUID } from 'node:crypto'
import { DateTime } from 'luxon'
import type { Config } from '../config/types.ts'
import { EXIT, FaultError } from '../fault.ts'
import { composeLetter } from './letter.ts'
import { createPost } from './post.ts'
import { resolveSecret } from './secret.ts'
import type { Delivery } from './types.ts'

/** Sends one test letter at once, past the outbox. Throws a FaultError where the configuration has no `mail`. */
export const sendTestLetter = async (config: Config, address: string): Promise<Delivery> => {
  if (config.mail === null)
    throw new FaultError(
      [
        {
          code: 'no-mail',
          place: { at: 'tendq.yaml' },
          what: 'there is no mail server, so no letter can be sent',
          remedy: 'add `mail:` with from, host, port and security',
        },
      ],
      EXIT.config,
    )
  const date = new Date()
  const post = createPost(config.mail, resolveSecret)
  try {
    return await post.send({
      to: address,
      messageId: `<test.${randomUUID()}@${config.mail.from.split('@')[1] ?? 'localhost'}>`,
      inReplyTo: null,
      text: composeLetter({
        kind: 'test',
        room: config.room,
        at: DateTime.fromJSDate(date, { zone: config.timeZone }).toISO() ?? date.toISOString(),
      }),
      date,
    })
  } finally {
    post.close()
  }
}
