import { describe, expect, it, onTestFinished } from 'vitest'
import type { QuietHours } from '../../src/config/types.ts'
import { noteDaily, writeDaily } from '../../src/daemon/daily.ts'
import { healthOf } from '../../src/daemon/health.ts'
import { addLetter } from '../../src/daemon/letter.ts'
import type { Stations } from '../../src/daemon/pipeline.ts'
import { sendDue } from '../../src/daemon/post.ts'
import type { AlarmFacts } from '../../src/mail/types.ts'
import { ALARM } from '../mail/facts.ts'
import { decodeHeader, headersOf, openMailbox, partOf } from '../mail/mailbox.ts'
import { freshStore } from '../store/room.ts'

const MINUTE = 60_000
const NOON = Date.parse('2026-03-10T12:00:00Z')

/** A room with a store and a mailbox; its clock stands where it is put. */
const roomWithMail = async ({ quiet = [] as readonly QuietHours[] } = {}) => {
  const { store, db } = freshStore()
  const box = await openMailbox()
  onTestFinished(box.close)
  const clock = { at: NOON }
  const config = {
    room: 'North bench',
    dataFolder: '/var/lib/tendq',
    timeZone: 'Europe/Dublin',
    keeper: ['keeper@lab.example'],
    dailyAt: 420,
    quiet,
    mail: box.settings,
    studies: [{ name: 'aging-40', tell: ['stability@lab.example'] }],
  }
  const log = { info: () => {}, warn: () => {}, error: () => {} }
  const stations = { store, log, now: () => clock.at, room: () => ({ config, rules: [] }) } as unknown as Stations
  const alarm = (n: number, facts: Partial<AlarmFacts> = {}): void => {
    const subject = facts.subject ?? `AGE40-${n}`
    const id = store.alarms.put({
      ...{
        rule: 'first-band-shift',
        of: 'sample',
        subject,
        study: 'aging-40',
        priority: 'high',
        state: 'unacknowledged',
      },
      ...{ active: true, latch: false, latched: false, shelvedUntil: null, raisedAt: clock.at, acknowledgedAt: null },
      ...{ acknowledgedBy: null, returnedAt: null, spectra: 1, diagnosis: null, confidence: null, message: 'moved' },
    } as Parameters<typeof store.alarms.put>[0])
    store.alarms.event(id, clock.at, 'raised', 'tendq', 'moved')
    addLetter({ ...ALARM, ...facts, alarm: id, subject }, stations)
  }
  const subjects = () => box.received.map(({ raw }) => decodeHeader(headersOf(raw).get('subject')!))
  return { store, db, box, clock, config, stations, alarm, subjects, send: () => sendDue(box.settings, stations) }
}

describe('a flood of alarms', () => {
  it('is one letter that lists them all, the most urgent first, with the cautions', async () => {
    const { alarm, send, subjects, box, db } = await roomWithMail()
    for (let n = 1; n <= 11; n++) alarm(n, { priority: n === 7 ? 'high' : 'low' })
    await send()
    expect(subjects()).toHaveLength(1)
    const text = partOf(box.received[0]!.raw, 'text/plain').replace(/\s+/g, ' ')
    for (let n = 1; n <= 11; n++) expect(text).toContain(`AGE40-${n}: First band has moved`)
    expect(text.indexOf('AGE40-7:')).toBeLessThan(text.indexOf('AGE40-1:'))
    expect(text).toContain('Your safety data sheet and local rules come first.')
    expect(text).toContain('no certified safety system')
    expect(db.prepare(`SELECT DISTINCT state, told_in FROM letters WHERE alarm IS NOT NULL`).all()).toEqual([
      { state: 'withdrawn', told_in: 12 },
    ])
  })

  it('does not begin with ten in ten minutes', async () => {
    const { alarm, send, subjects } = await roomWithMail()
    for (let n = 1; n <= 10; n++) alarm(n)
    await send()
    expect(subjects()).toHaveLength(10)
  })

  it('tells what follows in a digest every ten minutes, until fewer than five ring in ten minutes', async () => {
    const { alarm, send, subjects, clock } = await roomWithMail()
    for (let n = 1; n <= 11; n++) alarm(n)
    await send()
    clock.at += 5 * MINUTE
    for (let n = 12; n <= 17; n++) alarm(n)
    await send()
    expect(subjects()).toHaveLength(1)
    clock.at += 5 * MINUTE + 1
    await send()
    expect(subjects()).toHaveLength(2)
    expect(subjects()[1]).toContain('6 letters in one')
    clock.at += 20 * MINUTE
    alarm(18)
    await send()
    expect(subjects()[2]).toContain('AGE40-18: First band has moved')
  })
})

describe('quiet hours', () => {
  const quiet = [{ to: 'stability@lab.example', from: 22 * 60, until: 7 * 60 }]

  it('hold a letter until their end without counting an attempt, and let one of high priority through', async () => {
    const { alarm, send, subjects, clock, db } = await roomWithMail({ quiet })
    clock.at = Date.parse('2026-03-10T23:00:00Z')
    alarm(1, { priority: 'medium' })
    alarm(2, { priority: 'high' })
    await send()
    expect(subjects()).toHaveLength(1)
    expect(subjects()[0]).toContain('AGE40-2')
    expect(db.prepare(`SELECT state, attempts, next_attempt_at, held FROM letters WHERE alarm = 1`).get()).toEqual({
      ...{ state: 'waiting', attempts: 0, next_attempt_at: '2026-03-11T07:00:00Z' },
      held: 'quiet hours of stability@lab.example',
    })
    clock.at = Date.parse('2026-03-11T07:00:00Z')
    await send()
    expect(subjects()[1]).toContain('AGE40-1')
  })
})

describe('the daily letter', () => {
  it('comes on the first morning after the room began, once a day whatever is restarted, and says that all is well', async () => {
    const { stations, store, clock, send, box, subjects } = await roomWithMail()
    store.records.configurationInForce({ sha256: 'a', text: '' }, NOON)
    writeDaily(stations)
    clock.at = Date.parse('2026-03-11T06:59:00Z')
    writeDaily(stations)
    expect(store.daily.newest()).toBeNull()
    clock.at = Date.parse('2026-03-11T07:00:10Z')
    for (let i = 0; i < 3; i++) writeDaily(stations)
    await send()
    expect(subjects()).toEqual(['[North bench] Daily letter 2026-03-11: all is well'])
    expect(box.received[0]!.to).toEqual(['keeper@lab.example'])
    expect(partOf(box.received[0]!.raw, 'text/plain')).toContain('0 spectra of 0 samples')
    clock.at += 3 * 86_400_000 // nothing ran for three days: one letter, about all of them
    writeDaily(stations)
    writeDaily(stations)
    await send()
    expect(subjects()).toHaveLength(2)
    expect(partOf(box.received[1]!.raw, 'text/plain').replace(/\s+/g, ' ')).toContain('from 2026-03-11T07:00:10+00:00')
  })

  it('is missed: `status` is degraded when none went out for 26 hours, and not where it is turned off', async () => {
    const { stations, store, clock, send, db, config } = await roomWithMail()
    const missed = () =>
      healthOf(db, config.dataFolder, clock.at).reasons.filter((reason) => reason.includes('daily letter'))
    store.records.configurationInForce({ sha256: 'a', text: '' }, NOON)
    noteDaily(stations)
    clock.at += 26 * 60 * MINUTE
    expect(missed()).toEqual([])
    clock.at += 1
    expect(missed()).toHaveLength(1)
    writeDaily(stations)
    expect(missed()).toHaveLength(1) // written is not sent
    await send()
    expect(missed()).toEqual([])
    clock.at += 27 * 60 * MINUTE
    expect(missed()).toHaveLength(1)
    Object.assign(config, { dailyAt: null })
    noteDaily(stations)
    expect(missed()).toEqual([])
    expect(healthOf(db, config.dataFolder, clock.at).daily).toBeNull()
  })

  it('tells what stands, what was set aside and why, new unknown samples once, and what people decided', async () => {
    const { stations, store, clock, send, box, alarm } = await roomWithMail()
    store.records.configurationInForce({ sha256: 'a', text: '' }, NOON)
    const arrival = (file: string) =>
      store.arrivals.claim(
        {
          ...{ instrument: 'uv1', file, bytes: new TextEncoder().encode(file), sha256: file, mtimeMs: 1 },
          mark: { size: 1, mtimeMs: 1, ctimeMs: 1, inode: file.length },
        },
        clock.at,
      )
    store.arrivals.addOutcome(arrival('broken.csv'), 'rejected', 'broken.csv:3:5: no number', clock.at)
    const raw = { index: 0, x: new Float64Array(1), y: new Float64Array(1) } as unknown as Parameters<
      typeof store.spectra.add
    >[2]
    const identity = { sample: '<b>NEW</b>\r\nBcc: x@lab.example', measuredAt: NOON, flags: [], remarks: [] }
    store.spectra.add(arrival('new.csv'), 'uv1', raw, identity)
    store.records.decide(clock.at, 'Ines', 'exclude', 'spectrum 1', 'empty cell')
    alarm(1)
    clock.at = Date.parse('2026-03-11T07:00:00Z')
    writeDaily(stations)
    await send()
    const { raw: letter } = box.received.find(({ raw }) => raw.includes('Daily'))!
    const text = partOf(letter, 'text/plain').replace(/\s+/g, ' ')
    expect(text).toContain('uv1 broken.csv: broken.csv:3:5: no number')
    expect(text).toContain('high, unacknowledged since 2026-03-10T12:00:00Z: alarm 1, sample AGE40-1: moved')
    expect(text).toContain('<b>NEW</b> Bcc: x@lab.example on uv1')
    expect(text).toContain('Ines: exclude spectrum 1: empty cell')
    expect(partOf(letter, 'text/html')).toContain('&lt;b&gt;NEW&lt;/b&gt;')
    expect(headersOf(letter).has('bcc')).toBe(false)
    clock.at += 86_400_000
    writeDaily(stations)
    await send()
    const next = partOf(box.received.at(-1)!.raw, 'text/plain')
    expect(next).not.toContain('NEW')
    expect(next.replace(/\s+/g, ' ')).toContain('MORE THAN A DAY WITHOUT ACKNOWLEDGEMENT')
  })
})
