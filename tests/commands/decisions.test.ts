import Database from 'better-sqlite3'
import { describe, expect, it } from 'vitest'
import { spectrumText, type TestRoom, testRoom } from '../daemon/house.ts'

/** The same two bands, moved by so many cm⁻¹. */
const moved = (perCm: number, seed: number): string =>
  spectrumText({
    bands: [
      [19531 + perCm, 3500, 0.45],
      [26667 + perCm, 3900, 0.47],
    ],
    seed,
  })

const nameAt = (hour: number): string => `AGE-1_20260302T${String(hour).padStart(2, '0')}00.csv`

const measure = async (room: TestRoom, hours: readonly number[], perCm: number): Promise<void> => {
  for (const hour of hours) room.drop(nameAt(hour), moved(perCm, hour))
  expect((await room.run(['run', '--once'])).code).toBe(0)
}

const stateOf = (room: TestRoom) => room.rows<{ state: string }>('SELECT state FROM alarm_list')[0]?.state

describe('what people decide about an alarm', () => {
  it('acknowledged, shelved and back again by itself, every step with who and why', async () => {
    const room = testRoom()
    await measure(room, [0, 1, 2], 0)
    await measure(room, [3, 4], 300)
    expect(stateOf(room)).toBe('unacknowledged')
    const acknowledged = await room.run(['alarms', 'acknowledge', '1', '--by', 'Ines', '--note', 'seen'])
    expect(acknowledged.code).toBe(0)
    expect(stateOf(room)).toBe('acknowledged')
    expect((await room.run(['alarms', 'acknowledge', '1', '--by', 'Ines'])).code).toBe(64)
    expect((await room.run(['alarms', 'shelve', '1', '--for', '8h', '--by', 'Ines'])).code).toBe(0)
    expect(stateOf(room)).toBe('shelved')
    expect((await room.run(['status'])).stdout).toMatch(/alarm 1 of AGE-1 \(first-band-shift\) until \d{4}-/)
    const letters = room.rows('SELECT * FROM letters').length
    await measure(room, [5], 300)
    expect(stateOf(room)).toBe('shelved')
    expect(room.rows('SELECT * FROM letters')).toHaveLength(letters)

    const db = new Database(`${room.data}/tendq.db`)
    db.exec('UPDATE alarm SET shelved_until = 1') // its time is over
    db.close()
    await room.run(['run', '--once'])
    expect(stateOf(room)).toBe('unacknowledged')
    expect(room.rows('SELECT * FROM letters').length).toBeGreaterThan(letters)
    expect(room.rows<{ event: string; by: string }>('SELECT event, by FROM alarm_events')).toEqual([
      { event: 'raised', by: 'tendq' },
      { event: 'acknowledged', by: 'Ines' },
      { event: 'shelved', by: 'Ines' },
      { event: 'unshelved', by: 'tendq' },
    ])
  })

  it('refuses a shelf without an end that a person could mean', async () => {
    const room = testRoom()
    await measure(room, [0, 1, 2], 0)
    await measure(room, [3, 4], 300)
    for (const time of ['never', '0h', '31d', '8'])
      expect((await room.run(['alarms', 'shelve', '1', '--for', time, '--by', 'Ines'])).code, time).toBe(64)
    expect((await room.run(['alarms', 'reset', '1', '--by', 'Ines'])).stderr).toMatch(/alarm 1: /)
    expect((await room.run(['alarms', 'unshelve', '7', '--by', 'Ines'])).stderr).toMatch(/no such alarm/)
  })
})

describe('a spectrum that a person excludes', () => {
  it('stays visible, and the reference follows at once', async () => {
    const room = testRoom()
    await measure(room, [0, 1], 0)
    await measure(room, [2], 400) // someone measured another cell: it would pull the reference up
    const excluded = await room.run(['exclude', '3', '--by', 'Ines', '--why', 'wrong cell'])
    expect(excluded.code).toBe(0)
    await measure(room, [3, 4, 5], 0)
    const history = (await room.run(['history', 'AGE-1', '--json'])).stdout
      .trim()
      .split('\n')
      .map((line) => JSON.parse(line))
    expect(history).toHaveLength(6)
    expect(history.map(({ excluded }) => excluded)).toEqual([false, false, true, false, false, false])
    expect(history.at(-1).judgement).toBe('steady')
    expect(room.rows('SELECT by, what, subject, why FROM decisions')).toEqual([
      { by: 'Ines', what: 'exclude', subject: 'spectrum 3', why: 'wrong cell' },
    ])
    await room.run(['restore', '3', '--by', 'Ines', '--why', 'right after all'])
    expect(room.rows<{ excluded: number }>('SELECT excluded FROM history WHERE spectrum = 3')[0]?.excluded).toBe(0)
    expect((await room.run(['exclude', '99', '--by', 'Ines', '--why', 'x'])).code).toBe(64)
    expect((await room.run(['exclude', '3', '--by', ' ', '--why', 'x'])).code).toBe(64)
  })
})
