import { describe, expect, it } from 'vitest'
import type { Identity } from '../../src/analysis/index.ts'
import type { Stations } from '../../src/daemon/pipeline.ts'
import { followClock, inServiceSince, keepUntold, outOfService } from '../../src/daemon/service.ts'
import type { RawSpectrum } from '../../src/readers/types.ts'
import type { ServiceSubject } from '../../src/store/decisions.ts'
import { ALARM as FACTS } from '../mail/facts.ts'
import { arrivalOf, freshStore } from '../store/room.ts'

const HOUR = 3_600_000

const ROOM = {
  studyOf: () => ({ name: 'aging' }),
  config: {
    mail: { from: 'tendq@lab.example' },
    studies: [],
    keeper: ['keeper@lab.example'],
    dataFolder: '/var/lib/tendq',
  },
}

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
    ({ store, now: () => hour * HOUR, room: () => ROOM }) as unknown as Stations
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

describe('an alarm that rang while nobody was to hear it', () => {
  const shelved = (active: boolean) => {
    const room = measured()
    const id = room.store.alarms.put({
      ...ALARM,
      study: 'aging',
      priority: 'high',
      state: 'shelved',
      active,
      latch: false,
      latched: false,
      shelvedUntil: 105 * HOUR,
      raisedAt: 1,
      acknowledgedAt: null,
      acknowledgedBy: null,
      returnedAt: null,
      spectra: 1,
      diagnosis: null,
      confidence: null,
      message: 'First band has moved',
    })
    const events = () => room.store.letters.due(1e9, 10).map(({ facts }) => facts.kind === 'alarm' && facts.event)
    return { ...room, id, events }
  }

  it('is told when the shelving is over, once', () => {
    const { store, stations, id, events } = shelved(true)
    keepUntold({ ...FACTS, alarm: id }, stations(101))
    followClock(stations(104.9))
    expect(store.alarms.get(id)?.state).toBe('shelved')
    expect(events()).toEqual([])
    followClock(stations(105))
    followClock(stations(106))
    expect(store.alarms.get(id)?.state).toBe('unacknowledged')
    expect(events()).toEqual(['raised'])
  })

  it('is told too when a person unshelves it', () => {
    const { store, stations, id, events } = shelved(true)
    keepUntold({ ...FACTS, alarm: id }, stations(101))
    store.alarms.put({ ...store.alarms.get(id)!, state: 'unacknowledged', shelvedUntil: null })
    followClock(stations(102))
    followClock(stations(103))
    expect(events()).toEqual(['raised'])
  })

  it('is told as returned where people had heard that it rang, and not at all where they had not', () => {
    const heard = shelved(false)
    heard.store.letters.add(
      { alarm: heard.id, facts: { ...FACTS, alarm: heard.id }, subject: 's' },
      ['keeper@lab.example'],
      1,
      (letter) => `<${letter}@lab.example>`,
    )
    followClock(heard.stations(105))
    expect(heard.events()).toEqual(['raised', 'returned'])
    const unheard = shelved(false)
    keepUntold({ ...FACTS, alarm: unheard.id }, unheard.stations(101))
    followClock(unheard.stations(105))
    expect(unheard.store.alarms.get(unheard.id)?.state).toBe('normal')
    expect(unheard.events()).toEqual([])
  })

  it('comes back from a time out of service in one letter for each subject', () => {
    const { store, stations, id, takeOut, events } = shelved(true)
    const other = store.alarms.put({ ...store.alarms.get(id)!, rule: 'second' })
    for (const alarm of [id, other]) keepUntold({ ...FACTS, alarm }, stations(100))
    takeOut('study', 'aging', 101, 110)
    followClock(stations(102))
    expect(store.alarms.standing().map(({ state }) => state)).toEqual(['out-of-service', 'out-of-service'])
    followClock(stations(110))
    followClock(stations(111))
    expect(store.alarms.standing().map(({ state }) => state)).toEqual(['unacknowledged', 'unacknowledged'])
    expect(events()).toEqual(['raised'])
  })
})
