/** Dates and times as people write them. What has two readings (03/04/2026) has none here. */
import type { WrittenTime } from './types.ts'

export type TimeReading =
  | { readonly kind: 'time'; readonly time: WrittenTime }
  | { readonly kind: 'unclear'; readonly why: string }

interface Day {
  readonly year: number
  readonly month: number
  readonly day: number
}

const MONTHS = ['jan', 'feb', 'mar', 'apr', 'may', 'jun', 'jul', 'aug', 'sep', 'oct', 'nov', 'dec'] as const
/** Beginnings of names that differ from the English ones: German, French, Spanish. */
const OTHER_MONTHS: Readonly<Record<string, number>> = {
  mrz: 3,
  maer: 3,
  mai: 5,
  okt: 10,
  dez: 12,
  fev: 2,
  avr: 4,
  aout: 8,
  ene: 1,
  abr: 4,
  ago: 8,
  dic: 12,
  juin: 6,
  juil: 7,
}

const CLOCK = String.raw`(\d{1,2}):(\d{2})(?::(\d{2})(?:[.,](\d{1,9}))?)?\s*([AaPp]\.?[Mm]\.?)?\s*(Z|UTC|GMT|[+-]\d{2}:?\d{2})?`
const CLOCK_ALONE = new RegExp(`^${CLOCK}$`)
const DAY_THEN_CLOCK = new RegExp(`^(.*?\\d{2,4})(?:T|,?\\s+)(?:um |at |a las |à )?${CLOCK}$`)

/** One instant from a text that holds both date and time, or says why not. */
export const timeOf = (text: string): TimeReading => {
  const t = text.trim().replace(/\u2212/g, '-')
  const parts = DAY_THEN_CLOCK.exec(t)
  if (!parts) return { kind: 'unclear', why: `"${t}" is no date with a time of day` }
  return timeOfParts(parts[1]!, t.slice(parts[1]!.length).replace(/^(?:T|,?\s+)(?:um |at |a las |à )?/, ''))
}

/** One instant from a date and a time of day that stand apart. */
export const timeOfParts = (date: string, clock: string): TimeReading => {
  const day = dayOf(date.trim())
  if (typeof day === 'string') return { kind: 'unclear', why: day }
  const m = CLOCK_ALONE.exec(clock.trim())
  if (!m) return { kind: 'unclear', why: `"${clock.trim()}" is no time of day` }
  let hour = Number(m[1])
  const half = m[5]?.toLowerCase().replaceAll('.', '')
  if (half !== undefined && (hour < 1 || hour > 12))
    return { kind: 'unclear', why: `"${clock.trim()}" is no time of day` }
  if (half === 'pm' && hour < 12) hour += 12
  if (half === 'am' && hour === 12) hour = 0
  const [minute, second] = [Number(m[2]), Number(m[3] ?? 0)]
  if (hour > 23 || minute > 59 || second > 59) return { kind: 'unclear', why: `"${clock.trim()}" is no time of day` }
  const two = (n: number) => String(n).padStart(2, '0')
  const fraction = m[4] === undefined || /^0*$/.test(m[4]) ? '' : `.${m[4].slice(0, 3).padEnd(3, '0')}`
  const local = `${day.year}-${two(day.month)}-${two(day.day)}T${two(hour)}:${two(minute)}:${two(second)}${fraction}`
  return { kind: 'time', time: { local, offset: offsetOf(m[6]) } }
}

const offsetOf = (text: string | undefined): string | null => {
  if (text === undefined) return null
  if (/^(?:Z|UTC|GMT)$/.test(text)) return 'Z'
  return text.includes(':') ? text : `${text.slice(0, 3)}:${text.slice(3)}`
}

/** A calendar day, or in words why a text is none. */
const dayOf = (text: string): Day | string => {
  const yearFirst = /^(\d{4})[-/.](\d{1,2})[-/.](\d{1,2})$/.exec(text) ?? /^(\d{4})(\d{2})(\d{2})$/.exec(text)
  if (yearFirst) return checked(text, Number(yearFirst[1]), Number(yearFirst[2]), Number(yearFirst[3]))
  const dotted = /^(\d{1,2})\.\s?(\d{1,2})\.\s?(\d{4})$/.exec(text)
  if (dotted) return checked(text, Number(dotted[3]), Number(dotted[2]), Number(dotted[1]))
  const slashed = /^(\d{1,2})[/-](\d{1,2})[/-](\d{4})$/.exec(text)
  if (slashed) {
    const [a, b, year] = [Number(slashed[1]), Number(slashed[2]), Number(slashed[3])]
    if (a > 12) return checked(text, year, b, a)
    if (b > 12) return checked(text, year, a, b)
    if (a === b) return checked(text, year, a, b)
    return `"${text}" may be the ${a}th of month ${b} or the ${b}th of month ${a}`
  }
  const bare = text.replace(/^[A-Za-zÀ-ÿ]+\.?,\s*/, '')
  const named = /^(\d{1,2})\.?[\s-](?:de )?([A-Za-zÀ-ÿ]{3,10})\.?,?[\s-](?:de )?(\d{4})$/.exec(bare)
  if (named) return checked(text, Number(named[3]), monthOf(named[2]!), Number(named[1]))
  const monthFirst = /^([A-Za-z]{3,10})\.? (\d{1,2}),? (\d{4})$/.exec(bare)
  if (monthFirst) return checked(text, Number(monthFirst[3]), monthOf(monthFirst[1]!), Number(monthFirst[2]))
  return `"${text}" is no date that can be read in one way only`
}

const monthOf = (name: string): number => {
  const plain = name
    .normalize('NFD')
    .replace(/[\u0300-\u036f]/g, '')
    .toLowerCase()
  for (const [start, month] of Object.entries(OTHER_MONTHS)) if (plain.startsWith(start)) return month
  return MONTHS.findIndex((month) => plain.startsWith(month)) + 1
}

const checked = (text: string, year: number, month: number, day: number): Day | string => {
  const date = new Date(Date.UTC(year, month - 1, day))
  const real = date.getUTCFullYear() === year && date.getUTCMonth() === month - 1 && date.getUTCDate() === day
  return real && year >= 1950 && year < 2200 ? { year, month, day } : `"${text}" is no day of the calendar`
}
