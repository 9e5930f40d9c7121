import type { Logger } from 'pino'
import type { MailSettings } from '../config/types.ts'
import { composeLetter, createPost, hasExpired, nextAttemptDelayMs, resolveSecret } from '../mail/index.ts'
import type { Delivery, LetterFacts } from '../mail/types.ts'
import type { Store } from '../store/index.ts'
import type { WaitingLetter } from '../store/letters.ts'

/** Letters tried in one go; the next go follows at once while some are due. */
const AT_ONCE = 50

export interface PostOffice {
  readonly store: Store
  readonly log: Logger
  readonly now: () => number
}

/** Tries every letter that is due, once. A letter is marked after the server took it; the same Message-ID folds a repeat. */
export const sendDue = async (settings: MailSettings, { store, log, now }: PostOffice): Promise<void> => {
  const due = store.letters.due(now(), AT_ONCE)
  if (due.length === 0) return
  const post = createPost(settings, resolveSecret)
  try {
    for (const letter of due) {
      // a common change may have withdrawn it while the one before was on its way
      if (!store.letters.isWaiting(letter.id)) continue
      const delivery = await attempt(post, { ...letter, facts: freshest(letter.facts, store) })
      note(letter, delivery, { store, log, now })
      // a server that is down is down for the next letter too: let those wait with their own time unchanged
      if (delivery.kind === 'later' && delivery.unreachable === true) break
    }
  } finally {
    post.close()
  }
}

const attempt = async (post: ReturnType<typeof createPost>, letter: WaitingLetter): Promise<Delivery> => {
  try {
    return await post.send({
      to: letter.recipient,
      messageId: letter.messageId,
      inReplyTo: letter.inReplyTo,
      text: composeLetter(letter.facts),
      date: new Date(letter.createdAt),
    })
  } catch (error) {
    return { kind: 'later', why: error instanceof Error ? error.message : String(error) }
  }
}

const note = (letter: WaitingLetter, delivery: Delivery, { store, log, now }: PostOffice): void => {
  const at = now()
  if (delivery.kind === 'sent') {
    store.letters.markSent(letter.id, at)
    log.info({ letter: letter.letter, to: letter.recipient }, 'letter sent')
    return
  }
  const expired = letter.firstAttemptAt !== null && hasExpired(letter.firstAttemptAt, at)
  if (delivery.kind === 'refused' || expired) {
    store.letters.markFailed(letter.id, at, delivery.why)
    log.error({ letter: letter.letter, to: letter.recipient, why: delivery.why }, 'letter given up')
    return
  }
  store.letters.markLater(letter.id, at, at + nextAttemptDelayMs(letter.attempts + 1), delivery.why)
  log.warn({ letter: letter.letter, to: letter.recipient, why: delivery.why }, 'letter waits for the mail server')
}

/** The alarms that a common change has silenced by the time its letter goes out. */
const freshest = (facts: LetterFacts, store: Store): LetterFacts => {
  if (facts.kind !== 'alarm' || facts.samples === undefined) return facts
  const since = store.alarms.get(facts.alarm)?.raisedAt ?? 0
  return { ...facts, silenced: [...new Set(store.alarms.notes(facts.alarm, 'suppresses', since))] }
}
