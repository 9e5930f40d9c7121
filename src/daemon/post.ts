import type { MailSettings } from '../config/types.ts'
import { composeLetter, createPost, hasExpired, nextAttemptDelayMs, quietUntil, resolveSecret } from '../mail/index.ts'
import type { Delivery, LetterFacts } from '../mail/types.ts'
import type { Store } from '../store/index.ts'
import type { WaitingLetter } from '../store/letters.ts'
import { foldFlood } from './digest.ts'
import { addLetter } from './letter.ts'
import { pictureFor } from './picture.ts'
import type { Stations } from './pipeline.ts'

/** Letters tried in one go; the next go follows at once while some are due. */
const AT_ONCE = 50

/** Tries every letter that is due, once. A letter is marked after the server took it; the same Message-ID folds a repeat. */
export const sendDue = async (settings: MailSettings, stations: Stations): Promise<void> => {
  const { store, now } = stations
  foldFlood(stations)
  const due = store.letters.due(now(), AT_ONCE).filter((letter) => !isHeld(letter, stations))
  if (due.length === 0) return
  const post = createPost(settings, resolveSecret)
  try {
    for (const letter of due) {
      // a common change may have withdrawn it while the one before was on its way
      if (!store.letters.isWaiting(letter.id)) continue
      const delivery = await attempt(post, letter, stations)
      note(letter, delivery, stations)
      // a server that is down is down for the next letter too: let those wait with their own time unchanged
      if (delivery.kind === 'later' && delivery.unreachable === true) break
    }
  } finally {
    post.close()
  }
}

/** In the recipient's quiet hours a letter waits for their end, unless it is of high priority. */
const isHeld = ({ id, recipient, facts }: WaitingLetter, { store, room, now }: Stations): boolean => {
  const { quiet, timeZone } = room().config
  if ((facts.kind === 'alarm' || facts.kind === 'digest') && facts.priority === 'high') return false
  const until = quietUntil(recipient, quiet, timeZone, now())
  if (until !== null) store.letters.hold(id, until, `quiet hours of ${recipient}`)
  return until !== null
}

const attempt = async (
  post: ReturnType<typeof createPost>,
  letter: WaitingLetter,
  stations: Stations,
): Promise<Delivery> => {
  try {
    const facts = freshest(letter.facts, stations.store)
    return await post.send({
      to: letter.recipient,
      messageId: letter.messageId,
      inReplyTo: letter.inReplyTo,
      text: composeLetter(facts, await pictureFor(facts, stations)),
      date: new Date(letter.createdAt),
    })
  } catch (error) {
    return { kind: 'later', why: error instanceof Error ? error.message : String(error) }
  }
}

const note = (letter: WaitingLetter, delivery: Delivery, stations: Stations): void => {
  const { store, log, now } = stations
  const at = now()
  // withdrawn while it was on its way: what was sent is followed up, what was not stays withdrawn
  const isWithdrawn = !store.letters.isWaiting(letter.id)
  if (delivery.kind === 'sent') {
    store.atomically(() => {
      store.letters.markSent(letter.id, at)
      if (isWithdrawn) followUp(letter, stations)
    })
    log.info({ letter: letter.letter, to: letter.recipient }, 'letter sent')
    return
  }
  if (isWithdrawn) return
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

const followUp = ({ recipient, facts }: WaitingLetter, stations: Stations): void => {
  if (facts.kind !== 'alarm') return
  const why = stations.store.alarms.notes(facts.alarm, 'suppressed', 0).at(-1)
  if (stations.store.alarms.get(facts.alarm)?.state !== 'suppressed-by-design' || why === undefined) return
  addLetter({ ...facts, event: 'suppressed', also: [], explainedBy: why }, stations, [recipient])
}
