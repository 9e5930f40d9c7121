import { describe, expect, test } from 'vitest'
import { lastTimeOfDay, quietUntil } from '../../src/mail/index.ts'

const at = (iso: string): number => Date.parse(iso)
const iso = (ms: number | null): string | null => (ms === null ? null : new Date(ms).toISOString())
const DUBLIN = 'Europe/Dublin'

// Summer time in the Union begins and ends at 01:00 UTC on the last Sundays of March and October (Directive 2000/84/EC)
describe('the daily time', () => {
  test('is the newest moment at which the clock of the room said so', () => {
    expect(lastTimeOfDay(420, DUBLIN, at('2026-03-10T06:59:00Z'))).toEqual({
      day: '2026-03-09',
      at: at('2026-03-09T07:00:00Z'),
    })
    expect(lastTimeOfDay(420, DUBLIN, at('2026-03-10T07:00:00Z'))).toEqual({
      day: '2026-03-10',
      at: at('2026-03-10T07:00:00Z'),
    })
  })

  test('follows the clock into summer time, and comes once on a day whose hour is skipped or told twice', () => {
    expect(iso(lastTimeOfDay(420, DUBLIN, at('2026-03-29T12:00:00Z')).at)).toBe('2026-03-29T06:00:00.000Z')
    const half = 90 // 01:30 is skipped on 29 March, and comes twice on 25 October
    expect(lastTimeOfDay(half, DUBLIN, at('2026-03-29T12:00:00Z')).day).toBe('2026-03-29')
    const hours = Array.from({ length: 72 }, (_, i) => at('2026-10-24T00:10:00Z') + i * 3_600_000)
    const days = hours.map((now) => lastTimeOfDay(half, DUBLIN, now).day)
    expect([...new Set(days)]).toEqual(days.filter((day, i) => day !== days[i - 1]))
  })
})

describe('quiet hours', () => {
  const night = [{ to: 'stability@lab.example', from: 1320, until: 420 }]
  const until = (now: string, to = 'stability@lab.example') => iso(quietUntil(to, night, DUBLIN, at(now)))
  test('run over midnight and end by the clock of the room', () => {
    expect(until('2026-01-10T21:59:00Z')).toBeNull()
    expect(until('2026-01-10T22:00:00Z')).toBe('2026-01-11T07:00:00.000Z')
    expect(until('2026-01-11T06:59:00Z')).toBe('2026-01-11T07:00:00.000Z')
    expect(until('2026-01-11T07:00:00Z')).toBeNull()
    expect(until('2026-03-28T23:00:00Z')).toBe('2026-03-29T06:00:00.000Z') // the night in which summer time begins
  })
  test('are those of one recipient, whatever the case of the address', () => {
    expect(until('2026-01-10T23:00:00Z', 'Stability@lab.example')).not.toBeNull()
    expect(until('2026-01-10T23:00:00Z', 'keeper@lab.example')).toBeNull()
  })
})
