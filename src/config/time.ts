import { DateTime, IANAZone } from 'luxon'
import { suggestion } from '../rules/suggest.ts'

export type TimeReading =
  | { readonly kind: 'read'; readonly ms: number }
  | { readonly kind: 'refused'; readonly what: string; readonly remedy: string }

export const TIME_PATTERN = '^\\d{4}-\\d{2}-\\d{2}T\\d{2}:\\d{2}(:\\d{2}(\\.\\d+)?)?(Z|[+-]\\d{2}:\\d{2})$'
const WITH_OFFSET = new RegExp(TIME_PATTERN)
const REMEDY = 'write an ISO 8601 time with its offset, such as 2026-03-02T09:00:00Z or 2026-03-02T10:00+01:00'

/** ISO 8601 date and time with an offset → epoch milliseconds. A time without an offset means nothing and is refused. */
export const parseTime = (text: string): TimeReading => {
  if (!WITH_OFFSET.test(text)) {
    const bare = /^\d{4}-\d{2}-\d{2}(T\d{2}:\d{2}(:\d{2}(\.\d+)?)?)?$/.test(text)
    return { kind: 'refused', what: bare ? `"${text}" has no offset` : `"${text}" is no time`, remedy: REMEDY }
  }
  const time = DateTime.fromISO(text)
  return time.isValid
    ? { kind: 'read', ms: time.toMillis() }
    : { kind: 'refused', what: `"${text}" is on no calendar or clock`, remedy: REMEDY }
}

/** Null where the zone is known (IANA name, such as Europe/Dublin); else what is wrong and the nearest one. */
export const faultOfZone = (zone: string): { readonly what: string; readonly remedy: string } | null => {
  if (IANAZone.isValidZone(zone)) return null
  const near = suggestion(zone, Intl.supportedValuesOf('timeZone'))
  return {
    what: `"${zone}" is no time zone`,
    remedy: near === null ? 'write an IANA name, such as Europe/Dublin or UTC' : `did you mean ${near}?`,
  }
}
