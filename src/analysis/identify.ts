import { DateTime } from 'luxon'
import type { Instrument } from '../config/types.ts'
import type { RawSpectrum, WrittenTime } from '../readers/types.ts'
import type { Flag } from '../spectrum/types.ts'

/** Whose spectrum it is and when it was measured. */
export interface Identity {
  readonly sample: string | null
  /** Epoch milliseconds. */
  readonly measuredAt: number
  readonly flags: readonly Flag[]
  readonly remarks: readonly string[]
}

/** What is known of the file that holds the spectrum; `path` is relative to the drop folder, with forward slashes. */
export interface FileFacts {
  readonly path: string
  readonly mtimeMs: number
  readonly timeZone: string
}

/** As the instrument's configuration says: name and time from the file's name, its folder, or its header. */
export const identify = (raw: RawSpectrum, file: FileFacts, instrument: Instrument): Identity => {
  const named = fromName(file.path, instrument)
  const sample = instrument.sampleFrom === 'header' ? raw.sample : named.sample
  const written = named.time ?? raw.time
  const time = timeOf(written, file)
  return {
    sample,
    ...time,
    remarks: sample === null ? [...time.remarks, noSample(instrument)] : time.remarks,
  }
}

/** Without an instrument: the header first, then the file's name and date. */
export const identifyAlone = (raw: RawSpectrum, file: FileFacts): Identity => {
  const time = timeOf(raw.time, file)
  return { sample: raw.sample ?? stemOf(file.path), ...time }
}

const noSample = ({ sampleFrom, samplePattern }: Instrument): string =>
  sampleFrom === 'header'
    ? 'the header names no sample'
    : `the ${sampleFrom === 'folder' ? 'folder' : 'file'} name does not fit the pattern ${samplePattern ?? ''}`.trim()

const stemOf = (path: string): string => {
  const name = path.slice(path.lastIndexOf('/') + 1)
  const dot = name.lastIndexOf('.')
  return dot > 0 ? name.slice(0, dot) : name
}

const fromName = (path: string, instrument: Instrument): { sample: string | null; time: WrittenTime | null } => {
  if (instrument.sampleFrom === 'header') return { sample: null, time: null }
  const subject = instrument.sampleFrom === 'folder' ? (path.split('/').at(-2) ?? '') : stemOf(path)
  if (instrument.samplePattern === null) return { sample: subject === '' ? null : subject, time: null }
  const found = new RegExp(instrument.samplePattern, 'u').exec(subject)
  const written = found?.groups?.time
  return { sample: found?.groups?.sample ?? null, time: written === undefined ? null : parseNameTime(written) }
}

/** `20260302T0900`, `2026-03-02T09.00.00`, `20260302`: digits in the order year, month, day, hour, minute, second. */
const parseNameTime = (text: string): WrittenTime | null => {
  const offset = /(Z|[+-]\d{2}:?\d{2})$/.exec(text)?.[1] ?? null
  const digits = (offset === null ? text : text.slice(0, -offset.length)).replace(/\D/g, '')
  if (![8, 10, 12, 14].includes(digits.length)) return null
  const part = (from: number, to: number) => digits.slice(from, to).padEnd(to - from, '0')
  const local = `${part(0, 4)}-${part(4, 6)}-${part(6, 8)}T${part(8, 10)}:${part(10, 12)}:${part(12, 14)}`
  if (!DateTime.fromISO(local).isValid) return null
  return { local, offset: offset === null || offset === 'Z' ? offset : offset.replace(/(\d{2}):?(\d{2})$/, '$1:$2') }
}

const timeOf = (
  written: WrittenTime | null,
  { mtimeMs, timeZone }: FileFacts,
): { measuredAt: number; flags: readonly Flag[]; remarks: readonly string[] } => {
  const read =
    written === null
      ? null
      : written.offset === null
        ? DateTime.fromISO(written.local, { zone: timeZone })
        : DateTime.fromISO(`${written.local}${written.offset}`)
  if (read?.isValid) return { flags: [], ...first(read, written?.offset === null) }
  return {
    measuredAt: Math.round(mtimeMs),
    flags: ['time-from-file-date'],
    remarks: [
      written === null ? 'no time in the file: its date was taken' : 'no such time: the date of the file was taken',
    ],
  }
}

/** When clocks go back an hour happens twice: of two possible times the first is taken, and said so. */
const first = (time: DateTime, isLocal: boolean): { measuredAt: number; remarks: readonly string[] } => {
  const possible = isLocal ? time.getPossibleOffsets() : [time]
  const measuredAt = Math.min(...possible.map((one) => one.toMillis()))
  const local = time.toISO({ includeOffset: false, suppressMilliseconds: true })
  return { measuredAt, remarks: possible.length > 1 ? [`${local} happened twice that night; the first was taken`] : [] }
}
