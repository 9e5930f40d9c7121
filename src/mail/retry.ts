const FIRST_MS = 60_000
const LONGEST_MS = 3_600_000
const GIVE_UP_MS = 7 * 86_400_000

/** Wait after that many failed attempts: 1 min after the first, doubling, at most 1 h. ms */
export const nextAttemptDelayMs = (attempts: number): number =>
  Math.min(LONGEST_MS, FIRST_MS * 2 ** Math.max(0, attempts - 1))

/** Whether a letter first tried then is given up now: after 7 days. Both epoch ms. */
export const hasExpired = (firstAttemptAt: number, now: number): boolean => now - firstAttemptAt >= GIVE_UP_MS
