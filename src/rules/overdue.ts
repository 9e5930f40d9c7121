import type { Outcome } from './types.ts'

/**
 * Whether nothing came for `times` the schedule's interval, judged on the times of arrival. All times are epoch
 * milliseconds; `now` comes in as an argument. Nothing has come yet: undecided (gathering), the room is being set up.
 */
export const judgeOverdue = (times: number, everyMs: number, lastReceivedAt: number | null, now: number): Outcome =>
  lastReceivedAt === null
    ? { kind: 'undecided', because: 'gathering', what: 'nothing has arrived yet' }
    : now - lastReceivedAt > times * everyMs
      ? { kind: 'rings' }
      : { kind: 'clears' }

/**
 * The same for a schedule of ages (0 d, 1 d, 3 d …) after the study's beginning: a point of the schedule is overdue
 * when `times` the interval that leads up to it have passed since the point before it and nothing has come since half
 * of that interval. The first point allows as long as the interval after it. Only the latest point past its time counts.
 */
export const judgeOverdueSchedule = (
  times: number,
  schedule: { readonly began: number; readonly agesMs: readonly number[] },
  lastReceivedAt: number | null,
  now: number,
): Outcome => {
  const ages = schedule.agesMs.toSorted((a, b) => a - b)
  const points = ages.map((age, i) => {
    const before = ages[i - 1] ?? age
    const interval = age - before || (ages[i + 1] ?? age) - age
    return { countsFrom: schedule.began + age - interval / 2, lateFrom: schedule.began + before + times * interval }
  })
  const late = points.findLast(({ lateFrom }) => now > lateFrom)
  const came = late === undefined || (lastReceivedAt !== null && lastReceivedAt >= late.countsFrom)
  return came ? { kind: 'clears' } : { kind: 'rings' }
}
