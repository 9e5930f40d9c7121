import { DateTime } from 'luxon'
import { lastTimeOfDay } from '../mail/index.ts'
import type { DaemonNote } from './health.ts'
import { addRoomLetter } from './letter.ts'
import type { Stations } from './pipeline.ts'

const DAY_MS = 86_400_000

/** What `status` needs to know of the daily letter without reading the configuration. */
export interface DailyNote {
  /** Since when one is expected every day; null: it is turned off. */
  readonly since: number | null
}

/** Notes whether a daily letter is to be expected, from now on if it was not before. */
export const noteDaily = ({ store, room, now }: Pick<Stations, 'store' | 'room' | 'now'>): void => {
  const { dailyAt, mail } = room().config
  const isOn = dailyAt !== null && mail !== null
  const before = store.records.said<DailyNote>('daily')?.body.since ?? null
  if (isOn !== (before !== null)) store.records.say('daily', { since: isOn ? now() : null } satisfies DailyNote, now())
}

/**
 * Writes the daily letter to the keeper when its time has come: once a day, also after a restart, and one letter alone
 * for the days on which nothing ran. A room that has just begun waits for its first morning.
 */
export const writeDaily = (stations: Stations): void => {
  const { store, room, now } = stations
  const { config } = room()
  if (config.dailyAt === null || config.mail === null) return
  const due = lastTimeOfDay(config.dailyAt, config.timeZone, now())
  store.atomically(() => {
    const last = store.daily.newest()
    const begun = store.daily.firstRunAt()
    if (last !== null ? last.day >= due.day || last.until >= due.at : begun === null || begun >= due.at) return
    const since = last?.until ?? Math.max(begun!, now() - DAY_MS)
    const until = now()
    const note = store.records.said<DaemonNote>('daemon')?.body
    const inZone = (ms: number): string =>
      DateTime.fromMillis(ms, { zone: config.timeZone }).toISO({ suppressMilliseconds: true }) ?? ''
    const letter = addRoomLetter(
      {
        kind: 'daily',
        room: config.room,
        day: due.day,
        since: inZone(since),
        until: inZone(until),
        ...store.daily.report(since, until),
        troubles: [...(note?.troubles ?? []), ...unreachable(note)],
      },
      config.keeper,
      stations,
    )
    if (letter !== null) store.daily.add({ day: due.day, letter, since, until })
  })
}

const unreachable = (note: DaemonNote | undefined): readonly string[] =>
  (note?.instruments ?? [])
    .filter(({ reachable }) => !reachable)
    .map(({ instrument, why }) => `the drop folder of ${instrument} cannot be reached: ${why ?? 'it does not answer'}`)
