import Database from 'better-sqlite3'
import { describe, expect, it } from 'vitest'
import { exited, spectrumText, type TestRoom, testRoom, until } from '../daemon/house.ts'

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
    const times = ['never', '0h', '31d', '8']
    const ended = await Promise.all(
      times.map((time) => room.run(['alarms', 'shelve', '1', '--for', time, '--by', 'I'])),
    )
    expect(ended.map(({ code }) => code)).toEqual(times.map(() => 64))
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

/** One rule of these tests rings at once, so that one spectrum tells. */
const ringsAtOnce = (when: string): string => `rules:
  - rule: first-band-shift
    title: First band has moved
    of: sample
    when: "${when}"
    priority: high
`

const SHIFTED = 'abs(nu1 - reference(nu1)) > 60 cm^-1'

const follow = async (room: TestRoom): Promise<void> => {
  expect((await room.run(['run', '--once'])).code).toBe(0)
}

const lettersOf = (room: TestRoom): readonly string[] =>
  room.rows<{ subject: string }>('SELECT subject FROM letters ORDER BY id').map(({ subject }) => subject)

/** Sets the only time out of service as if it had been asked for with these ends, in hours from now. */
const letTimePass = (room: TestRoom, sinceHours: number, untilHours: number): void => {
  const db = new Database(`${room.data}/tendq.db`)
  db.exec('DROP TRIGGER out_of_service_no_update') // the next start makes it anew
  const at = (hours: number): number => Date.now() + hours * 3_600_000
  db.prepare('UPDATE out_of_service SET since = ?, until = ?').run(at(sinceHours), at(untilHours))
  db.close()
}

describe('a decision changes what is judged at once', () => {
  it('a running mean and its alarm forget an excluded spectrum, and remember it when it is restored', async () => {
    const room = testRoom()
    room.write('rules/bands.yaml', ringsAtOnce('abs(mean(nu1, 3) - reference(nu1)) > 60 cm^-1'))
    await measure(room, [0, 1, 2], 0)
    await measure(room, [3], 400)
    expect(stateOf(room)).toBe('unacknowledged')
    const daemon = await room.start()
    expect((await room.run(['exclude', '4', '--by', 'Ines', '--why', 'empty cell'])).stdout).toMatch(
      /spectrum 4 of AGE-1 \(uv1, 2026-03-02T03:00:00Z\) stays visible/,
    )
    expect((await room.run(['exclude', '4', '--by', 'Ines', '--why', 'again'])).code).toBe(64)
    await until('the running daemon follows', () => stateOf(room) === 'returned-unacknowledged')
    daemon.kill('SIGTERM')
    await exited(daemon)
    expect(lettersOf(room).at(-1)).toMatch(/AGE-1: back to normal/)
    // the arithmetic mean of what the history shows, with and without the excluded one
    const nu1 = room
      .rows<{ nu1_cm1: number }>('SELECT nu1_cm1 FROM history ORDER BY spectrum')
      .map((row) => row.nu1_cm1)
    const mean = (from: number, to: number): number => nu1.slice(from, to).reduce((sum, one) => sum + one / 3, 0)
    expect(mean(1, 4) - mean(0, 3)).toBeGreaterThan(60)
    const [judged] = room.rows(
      `SELECT spectrum, outcome FROM judgement WHERE rule = 'first-band-shift' ORDER BY id DESC`,
    )
    expect(judged).toEqual({ spectrum: 3, outcome: 'clears' })
    const events = room.rows<{ event: string; by: string; note: string }>('SELECT event, by, note FROM alarm_events')
    expect(events.map(({ event }) => event)).toEqual(['raised', 'decision', 'returned'])
    expect(events[1]).toMatchObject({ by: 'Ines', note: 'exclude spectrum 4: empty cell' })

    await room.run(['restore', '4', '--by', 'Ines', '--why', 'right cell after all'])
    await follow(room)
    expect(stateOf(room)).toBe('unacknowledged')

    const cracked = ['--by', 'Ines', '--why', 'cracked cell']
    await Promise.all([1, 2, 3, 4].map((id) => room.run(['exclude', `${id}`, ...cracked])))
    await follow(room)
    expect(stateOf(room)).toBe('returned-unacknowledged') // nothing is left that it could ring for
    expect(room.rows('SELECT decision, note FROM decision_followed')).toEqual(
      [1, 2, 3, 4, 5, 6].map((decision) => ({ decision, note: null })),
    )
  })

  it('a spectrum with the wrong name is analysed anew for its right sample, and rings for the wrong one no longer', async () => {
    const room = testRoom()
    room.write('rules/bands.yaml', ringsAtOnce(SHIFTED))
    for (const hour of [0, 1, 2]) room.drop(nameAt(hour).replace('AGE-1', 'AGE-2'), moved(400, 10 + hour))
    await measure(room, [0, 1, 2], 0)
    await measure(room, [3], 400)
    expect(room.rows(`SELECT subject FROM alarm_list WHERE state <> 'normal'`)).toEqual([{ subject: 'AGE-1' }])
    const said = await room.run(['reassign', '7', '--sample', 'AGE-2', '--by', 'Ines', '--why', 'vials swapped'])
    expect(said.stdout).toMatch(/spectrum 7 of AGE-1 .* is now of AGE-2\nit is analysed anew as study aging says/)
    const at = (sample: string) =>
      room.rows(`SELECT spectrum, nu1_cm1, judgement, came_as FROM history WHERE sample = '${sample}' AND spectrum = 7`)
    expect(at('AGE-1')).toEqual([])
    expect(at('AGE-2')).toEqual([{ spectrum: 7, nu1_cm1: null, judgement: null, came_as: 'AGE-1' }])
    await follow(room)
    expect(stateOf(room)).toBe('returned-unacknowledged')
    expect(at('AGE-2')).toMatchObject([{ judgement: 'steady', came_as: 'AGE-1' }])
    expect(room.rows('SELECT id FROM analysis WHERE spectrum = 7')).toHaveLength(2)
    expect(room.rows(`SELECT what, from_sample, to_sample, why FROM decisions`)).toEqual([
      { what: 'reassign', from_sample: 'AGE-1', to_sample: 'AGE-2', why: 'vials swapped' },
    ])
    expect((await room.run(['reassign', '7', '--sample', 'AGE-2', '--by', 'I', '--why', 'x'])).code).toBe(64)
    const unknown = await room.run(['reassign', '7', '--sample', 'BLANK', '--by', 'Ines', '--why', 'a blank'])
    expect(unknown.code).toBe(0)
    expect(unknown.stdout).toMatch(/no study claims BLANK/)
  })

  it('a reference that was refused for its slope is fixed when a person says so', async () => {
    const room = testRoom()
    room.write('rules/bands.yaml', ringsAtOnce(SHIFTED))
    const asked = ['approve-reference', 'AGE-1', '--by', 'Ines', '--why', 'the cell was warming up']
    for (const hour of [0, 1]) room.drop(nameAt(hour), moved(100 * hour, hour))
    await follow(room)
    expect((await room.run(asked)).stderr).toMatch(/AGE-1: its reference is still being gathered: 2 of 3 occasions/)
    await measure(room, [2], 200)
    await measure(room, [3], 300)
    expect(stateOf(room)).not.toBe('unacknowledged')
    expect(room.rows('SELECT * FROM reference_set')).toEqual([])
    const approved = await room.run(asked)
    expect(approved.stdout).toMatch(/the reference of AGE-1 on uv1 is fixed on spectra 1, 2, 3: .*nu1 /)
    await follow(room)
    expect(room.rows(`SELECT rule, state FROM alarm_list WHERE rule = 'first-band-shift'`)).toEqual([
      { rule: 'first-band-shift', state: 'unacknowledged' },
    ])
    expect((await room.run(asked)).stderr).toMatch(/fixed on just these spectra already \(1, 2, 3\)/)
    expect((await room.run([...asked, '--newest'])).stdout).toMatch(/fixed on spectra 2, 3, 4/)
    expect((await room.run(['approve-reference', 'AGE-9', '--by', 'Ines', '--why', 'x'])).code).toBe(64)
  })
})

describe('a time out of service', () => {
  it('is set ahead, silences what rings in it, and ends by itself with the letter that was held back', async () => {
    const room = testRoom()
    room.write('rules/bands.yaml', ringsAtOnce(SHIFTED))
    await measure(room, [0, 1, 2], 0)
    const [from, to] = [24, 48].map((hours) => new Date(Date.now() + hours * 3_600_000).toISOString())
    const asked = ['out-of-service', '--instrument', 'uv1', '--by', 'Ines', '--why', 'new lamp']
    expect((await room.run([...asked, '--from', from!, '--until', to!])).code).toBe(0)
    expect((await room.run(['status'])).stdout).toMatch(
      /out of service.*\n {2}instrument uv1 from .* until .*, by Ines: new lamp/,
    )

    letTimePass(room, -1, 23)
    await measure(room, [3], 400)
    expect(room.rows('SELECT state, spectra FROM alarm_list')).toEqual([{ state: 'out-of-service', spectra: 1 }])
    expect(lettersOf(room)).toEqual([])

    letTimePass(room, -2, -1)
    await follow(room)
    expect(stateOf(room)).toBe('unacknowledged')
    expect(lettersOf(room)).toHaveLength(1)
    expect(lettersOf(room)[0]).toMatch(/AGE-1: First band has moved, .*\+4\d\d/)
    expect(room.rows<{ event: string }>('SELECT event FROM alarm_events').map(({ event }) => event)).toEqual([
      'raised',
      'returned-to-service',
    ])
  })

  it('is ended early by a person, and refused without an end, a name or a reason', async () => {
    const room = testRoom()
    room.write('rules/bands.yaml', ringsAtOnce(SHIFTED))
    await measure(room, [0, 1, 2], 0)
    await measure(room, [3], 400)
    const who = ['--by', 'Ines', '--why', 'stirrer broken']
    const end = ['--until', new Date(Date.now() + 3_600_000).toISOString()]
    expect((await room.run(['out-of-service', '--study', 'aging', ...end, ...who])).code).toBe(0)
    await measure(room, [4], 0)
    expect(room.rows('SELECT state FROM alarm_list')).toEqual([{ state: 'out-of-service' }])
    expect(lettersOf(room)).toHaveLength(1)
    expect((await room.run(['return-to-service', '--study', 'aging', ...who])).stdout).toMatch(/study aging is back in/)
    await follow(room)
    expect(stateOf(room)).toBe('normal')
    expect(lettersOf(room)).toHaveLength(2)
    expect(lettersOf(room)[1]).toMatch(/back to normal/)
    expect((await room.run(['return-to-service', '--study', 'aging', ...who])).code).toBe(64)
    const refused = [
      ['--study', 'aging', ...who],
      ['--study', 'aging', '--until', '2020-01-01', ...who],
      ['--study', 'aging', '--until', '2999-01-01', ...who],
      ['--study', 'agign', ...end, ...who],
      ['--study', 'aging', '--sample', 'AGE-1', ...end, ...who],
      ['--study', 'aging', ...end, '--by', 'Ines', '--why', ' '],
    ]
    const codes = await Promise.all(refused.map((args) => room.run(['out-of-service', ...args])))
    expect(codes.map(({ code }) => code)).toEqual(refused.map(() => 64))
    expect(codes[3]!.stderr).toMatch(/there is no study agign; the configuration names aging/)
  })
})

describe('a study that wants its references approved', () => {
  it('compares with nothing until a person has approved, and says what to do', async () => {
    const room = testRoom()
    room.write('studies/aging.yaml', `${room.read('studies/aging.yaml')}approve-reference: true\n`)
    await measure(room, [0, 1, 2, 3], 0)
    const last = () =>
      room.rows<{ outcome: string; what: string }>(
        `SELECT outcome, what FROM judgement WHERE rule = 'first-band-shift' ORDER BY id DESC LIMIT 1`,
      )[0]!
    expect(last().outcome).toBe('undecided')
    expect(last().what).toMatch(/awaits approval: tendq approve-reference AGE-1 --instrument uv1/)
    await room.run(['approve-reference', 'AGE-1', '--by', 'Ines', '--why', 'looked at all three'])
    await follow(room)
    expect(last().outcome).toBe('clears')
  })
})
