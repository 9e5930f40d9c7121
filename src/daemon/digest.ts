// A flood of alarms: one letter in place of many, for whoever would have had them.
import type { AlarmFacts } from '../mail/types.ts'
import { addRoomLetter, URGENCY } from './letter.ts'
import type { Stations } from './pipeline.ts'

/** A flood begins above ten alarms in ten minutes and ends below five (EEMUA 191, as facts of the trade: from memory). */
const WINDOW_MS = 600_000
const BEGINS_ABOVE = 10
const ENDS_BELOW = 5

interface Flood {
  /** Since when it lasts; null: there is none. */
  readonly since: number | null
  readonly digestAt: number
}

/** Before letters are sent: in a flood those that wait become one for each recipient, at most every ten minutes. */
export const foldFlood = ({ store, room, now }: Pick<Stations, 'store' | 'room' | 'now'>): void => {
  store.atomically(() => {
    const at = now()
    const was = store.records.said<Flood>('flood')?.body ?? { since: null, digestAt: 0 }
    const rate = store.letters.raisedSince(at - WINDOW_MS)
    const lasts = was.since === null ? rate > BEGINS_ABOVE : rate >= ENDS_BELOW
    if (!lasts) {
      if (was.since !== null) store.records.say('flood', { ...was, since: null } satisfies Flood, at)
      return
    }
    const waiting = store.letters.waitingAlarms()
    const next = was.since === null ? at : was.digestAt + WINDOW_MS
    if (at < next) {
      for (const { id } of waiting) store.letters.hold(id, next, 'many alarms at once: waits for the next digest')
      return
    }
    for (const recipient of new Set(waiting.map((letter) => letter.recipient)))
      fold(
        waiting.filter((letter) => letter.recipient === recipient),
        recipient,
        { store, room, now },
      )
    store.records.say('flood', { since: was.since ?? at, digestAt: at } satisfies Flood, at)
  })
}

type Waiting = { readonly id: number; readonly alarm: number; readonly subject: string; readonly facts: AlarmFacts }

const fold = (
  letters: readonly Waiting[],
  recipient: string,
  stations: Pick<Stations, 'store' | 'room' | 'now'>,
): void => {
  if (letters.length < 2) return
  const sorted = letters.toSorted((a, b) => URGENCY[b.facts.priority] - URGENCY[a.facts.priority] || a.id - b.id)
  const digest = addRoomLetter(
    {
      kind: 'digest',
      room: stations.room().config.room,
      priority: sorted[0]!.facts.priority,
      letters: sorted.flatMap(({ alarm, subject, facts }) => [
        { alarm, subject: `${facts.priority}, alarm ${alarm}: ${subject}` },
        ...(facts.also ?? []).map((line, i) => ({
          alarm: facts.alsoAlarms?.[i] ?? alarm,
          subject: `${facts.priority}, ${facts.subject}: ${line}`,
        })),
      ]),
      cautions: [...new Set(sorted.flatMap(({ facts }) => facts.cautions))],
    },
    [recipient],
    stations,
  )
  for (const { id } of letters) stations.store.letters.withdraw(id, 'many alarms at once: told in a digest', digest)
}
