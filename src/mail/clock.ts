import { DateTime } from 'luxon'
import type { QuietHours } from '../config/types.ts'

/** `minutes` after midnight on the day of `time`; where that hour is skipped (summer time) the moment after the gap. */
const onDayOf = (time: DateTime, minutes: number): DateTime =>
  time.startOf('day').set({ hour: Math.floor(minutes / 60), minute: minutes % 60 })

/** The newest moment at or before `now` at which the clock of the zone said so, with its day. */
export const lastTimeOfDay = (minutes: number, zone: string, now: number): { day: string; at: number } => {
  const time = DateTime.fromMillis(now, { zone })
  const today = onDayOf(time, minutes)
  const last = today.toMillis() <= now ? today : onDayOf(time.minus({ days: 1 }), minutes)
  return { day: last.toISODate() ?? '', at: last.toMillis() }
}

/** When this recipient's quiet hours end, if `now` lies in them; null where it does not. Epoch ms. */
export const quietUntil = (
  recipient: string,
  hours: readonly QuietHours[],
  zone: string,
  now: number,
): number | null => {
  const time = DateTime.fromMillis(now, { zone })
  const minute = time.hour * 60 + time.minute
  const inForce = hours.find(
    ({ to, from, until }) =>
      to.toLowerCase() === recipient.toLowerCase() &&
      (from < until ? minute >= from && minute < until : minute >= from || minute < until),
  )
  if (inForce === undefined) return null
  const today = onDayOf(time, inForce.until)
  return (today.toMillis() > now ? today : onDayOf(time.plus({ days: 1 }), inForce.until)).toMillis()
}
