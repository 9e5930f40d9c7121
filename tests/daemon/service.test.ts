import { describe, expect, it } from 'vitest'
import type { Identity } from '../../src/analysis/index.ts'
import type { Stations } from '../../src/daemon/pipeline.ts'
import { inServiceSince, outOfService } from '../../src/daemon/service.ts'
import type { RawSpectrum } from '../../src/readers/types.ts'
import type { ServiceSubject } from '../../src/store/decisions.ts'
import { arrivalOf, freshStore } from '../store/room.ts'

const HOUR = 3_600_000

/** A sample of the study `aging`, measured on uv1 and uv2; the clock stands at hour 100. */
const measured = () => {
  const { store } = freshStore()
  for (const instrument of ['uv1', 'uv2']) {
    const arrival = store.arrivals.claim(arrivalOf(instrument, { instrument }), 1)
    const raw = { index: 0, x: new Float64Array(1), y: new Float64Array(1) } as unknown as RawSpectrum
    store.spectra.add(arrival, instrument, raw, {
      sample: 'AGE-1',
      measuredAt: 1,
      flags: [],
      remarks: [],
    } satisfies Identity)
  }
  const stations = (hour: number): Stations =>
    ({ store, now: () => hour * HOUR, room: () => ({ studyOf: () => ({ name: 'aging' }) }) }) as unknown as Stations
  const takeOut = (of: ServiceSubject, subject: string, since: number, until: number): void => {
    const decision = store.records.decide(1, 'Ines', 'out-of-service', `${of} ${subject}`, 'new lamp')
    store.decisions.takeOutOfService(decision, { of, subject, since: since * HOUR, until: until * HOUR })
  }
  return { store, stations, takeOut }
}

const ALARM = { rule: 'r', of: 'sample', subject: 'AGE-1' } as const

describe('what is out of service', () => {
  it('is so from its beginning until just before its end', () => {
    const { stations, takeOut } = measured()
    takeOut('sample', 'AGE-1', 100, 110)
    const isOut = (hour: number) => outOfService(ALARM, stations(hour)) !== null
    expect([99.9, 100, 109.9, 110].map(isOut)).toEqual([false, true, true, false])
    expect(outOfService({ ...ALARM, subject: 'AGE-2' }, stations(105))).toBeNull()
  })

  it('covers the samples of a study, and its own alarms', () => {
    const { stations, takeOut } = measured()
    takeOut('study', 'aging', 100, 110)
    expect(outOfService(ALARM, stations(105))).toMatchObject({ of: 'study', by: 'Ines', why: 'new lamp' })
    expect(outOfService({ rule: 'r', of: 'study', subject: 'aging' }, stations(105))).not.toBeNull()
    expect(outOfService({ rule: 'r', of: 'instrument', subject: 'uv1' }, stations(105))).toBeNull()
  })

  it('silences a sample for an instrument only while no other instrument finds the same', () => {
    const { store, stations, takeOut } = measured()
    takeOut('instrument', 'uv1', 100, 110)
    const isOut = () => outOfService(ALARM, stations(105)) !== null
    expect(isOut()).toBe(false)
    store.alarms.setWatch(ALARM, 'uv1', true)
    expect(isOut()).toBe(true)
    store.alarms.setWatch(ALARM, 'uv2', true)
    expect(isOut()).toBe(false)
    takeOut('instrument', 'uv2', 100, 110)
    expect(isOut()).toBe(true)
  })

  it('is not overdue meanwhile, and gets its whole interval when it is back', () => {
    const { store, stations, takeOut } = measured()
    expect(inServiceSince('instrument', 'uv1', stations(105))).toBe(0)
    takeOut('instrument', 'uv1', 100, 110)
    expect(inServiceSince('instrument', 'uv1', stations(105))).toBeNull()
    expect(inServiceSince('instrument', 'uv1', stations(120))).toBe(110 * HOUR)
    expect(inServiceSince('sample', 'AGE-1', stations(120))).toBe(110 * HOUR)
    const decision = store.records.decide(1, 'Ines', 'return-to-service', 'instrument uv1', 'done')
    store.decisions.returnToService(decision, 1, 104 * HOUR)
    expect(inServiceSince('instrument', 'uv1', stations(105))).toBe(104 * HOUR)
  })

  it('counts for nothing when it was called off before it began', () => {
    const { store, stations, takeOut } = measured()
    takeOut('instrument', 'uv1', 100, 110)
    store.decisions.returnToService(store.records.decide(1, 'Ines', 'return-to-service', 'x', 'y'), 1, 90 * HOUR)
    expect(outOfService({ rule: 'r', of: 'instrument', subject: 'uv1' }, stations(105))).toBeNull()
    expect(inServiceSince('instrument', 'uv1', stations(120))).toBe(0)
  })
})
