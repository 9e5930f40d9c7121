import { describe, expect, it } from 'vitest'
import { headersOf, leavesOf, partOf } from '../mail/mailbox.ts'
import { exited, mailReceiver, spectrumText, testRoom, until } from './house.ts'

/** Chloride replaced by water: both bands move to the blue as the product forms. */
const converted = (part: number, seed: number): string =>
  spectrumText({
    bands: [
      [19531, 3500, 0.45 * (1 - part)],
      [26667, 3900, 0.47 * (1 - part)],
      [20833, 3500, 0.44 * part],
      [27778, 3900, 0.38 * part],
    ],
    seed,
  })

const nameAt = (sample: string, hour: number): string =>
  `${sample}_202603${String(2 + Math.floor(hour / 24)).padStart(2, '0')}T${String(hour % 24).padStart(2, '0')}00.csv`

describe('the daemon', () => {
  it('turns dropped files into Δo, B, a history, an alarm and a letter', async () => {
    const mail = await mailReceiver()
    const room = testRoom(mail.port)
    const daemon = await room.start()
    for (let i = 0; i < 4; i++) room.drop(nameAt('AGE-1', i * 6), converted(0, i))
    await until('four spectra are kept', () => room.rows('SELECT * FROM history').length === 4)
    const kept = room.rows<{ delta_cm1: number; b_cm1: number; u_delta_cm1: number; judgement: string }>(
      'SELECT * FROM history ORDER BY measured_at',
    )
    for (const row of kept) {
      expect(Math.abs(row.delta_cm1 - 19531)).toBeLessThan(15)
      expect(row.u_delta_cm1).toBeGreaterThan(0)
    }
    expect(kept.map(({ judgement }) => judgement).at(-1)).toBe('steady')
    expect(room.rows('SELECT * FROM alarm_list')).toEqual([])

    for (let i = 4; i < 7; i++) room.drop(nameAt('AGE-1', i * 6), converted(0.3, i))
    await until('the letter arrives', () => mail.letters.length === 1)
    expect(room.rows('SELECT rule, subject, state FROM alarm_list')).toEqual([
      { rule: 'first-band-shift', subject: 'AGE-1', state: 'unacknowledged' },
    ])
    expect(mail.letters[0]).toContain('To: stability@lab.example')
    expect(mail.letters[0]).toMatch(/^Subject: .*AGE-1/m)
    // the trend stands inside the letter, and is described for who cannot see it
    const html = partOf(mail.letters[0]!, 'text/html')
    const [, cid, alt] = /<img src="cid:([^"]+)" alt="([^"]+)"/.exec(html)!
    expect(alt).toMatch(
      /^ν1 \/ cm⁻¹: 6 occasions, from \d+.* reference 195\d\d.*; the rule rings beyond 19\d+.* and 19\d+.*; the rule rang on 2 of them$/,
    )
    expect(partOf(mail.letters[0]!, 'text/plain').replace(/\s+/g, ' ')).toContain(`Picture: ${alt}.`)
    const picture = leavesOf(mail.letters[0]!).find((part) => part.includes('image/png'))!
    expect(headersOf(picture).get('content-id')).toBe(`<${cid}>`)
    expect(headersOf(picture).get('content-disposition')).toContain('inline')
    await until(
      'the letter is noted as sent',
      () => room.rows(`SELECT * FROM letters WHERE state = 'sent'`).length === 1,
    )

    daemon.kill('SIGTERM')
    expect(await exited(daemon)).toBe(0)
  })

  it('writes one letter for one cause, also when several rules ring on the same spectrum', async () => {
    const mail = await mailReceiver()
    const room = testRoom(mail.port)
    const rules = room.read('rules/bands.yaml')
    room.write(
      'rules/bands.yaml',
      `${rules}  - rule: second-band-shift
    title: Second band has moved
    of: sample
    studies: [ "*" ]
    when: "abs(nu2 - reference(nu2)) > 60 cm^-1"
    persist: 2
    priority: low
`,
    )
    for (let i = 0; i < 3; i++) room.drop(nameAt('AGE-1', i * 6), converted(0, i))
    await room.run(['run', '--once'])
    for (let i = 3; i < 5; i++) room.drop(nameAt('AGE-1', i * 6), converted(0.3, i))
    await room.run(['run', '--once'])
    expect(room.rows('SELECT * FROM alarm_list')).toHaveLength(2)
    expect(mail.letters).toHaveLength(1)
    expect(mail.letters[0]).toContain('High priority')
    expect(mail.letters[0]).toContain('AT THE SAME TIME')
    expect(mail.letters[0]).toContain('Second band has moved')
  })

  it('sets a broken file aside with its reason and goes on', async () => {
    const room = testRoom()
    room.drop('AGE-2_20260302T0900.csv', 'wavelength (nm),absorbance\n400,0.1\n401,nonsense\n402,0.2\n')
    room.drop(nameAt('AGE-1', 0), converted(0, 1))
    const ended = await room.run(['run', '--once'])
    expect(ended.code).toBe(0)
    const intake = room.rows<{ file: string; outcome: string; reason: string | null }>(
      'SELECT file, outcome, reason FROM intake ORDER BY file',
    )
    expect(intake.map(({ outcome }) => outcome)).toEqual(['stored', 'rejected'])
    expect(intake[1]?.reason).toMatch(/AGE-2_20260302T0900\.csv:3:5: .*nonsense.*; /)
    const status = await room.run(['status', '--json'])
    expect(status.code).toBe(1)
    const health = JSON.parse(status.stdout)
    expect(health.reasons.join()).toMatch(/no daemon.*a file was set aside: uv1 AGE-2_20260302T0900\.csv/)
    expect(health.set_aside[0].reason).toBe(intake[1]?.reason)
  })

  it('keeps a file once, whatever it is called and however often it is touched', async () => {
    const room = testRoom()
    room.drop(nameAt('AGE-1', 0), converted(0, 1))
    await room.run(['run', '--once'])
    room.drop(nameAt('AGE-1', 6), converted(0, 1))
    room.drop(nameAt('AGE-1', 0), converted(0, 1))
    await room.run(['run', '--once'])
    expect(room.rows('SELECT * FROM history')).toHaveLength(1)
    expect(room.rows<{ outcome: string }>('SELECT outcome FROM intake').map(({ outcome }) => outcome)).toEqual([
      'stored',
      'repeated',
      'repeated',
    ])
  })

  it('keeps letters while the mail server is down and sends them when it is back', async () => {
    const first = await mailReceiver()
    await first.stop()
    const room = testRoom(first.port)
    for (let i = 0; i < 3; i++) room.drop(nameAt('AGE-1', i * 6), converted(0, i))
    await room.run(['run', '--once'])
    for (let i = 3; i < 6; i++) room.drop(nameAt('AGE-1', i * 6), converted(0.4, i))
    expect((await room.run(['run', '--once'])).code).toBe(0)
    const [waiting] = room.rows<{ state: string; attempts: number; message_id: string; last_error: string }>(
      'SELECT * FROM letters',
    )
    expect(waiting).toMatchObject({ state: 'waiting', attempts: 1 })
    expect(waiting!.last_error).not.toBe('')
    const status = await room.run(['status'])
    expect(status.stdout).toMatch(/1 letters? waits? since/)
    const back = await mailReceiver(first.port)
    room.hurry() // the first pause is a minute
    await room.run(['run', '--once'])
    expect(back.letters).toHaveLength(1)
    expect(back.letters[0]).toContain(waiting!.message_id)
  })

  it('leaves with 75 when another daemon holds the data folder, and says which', async () => {
    const room = testRoom()
    const daemon = await room.start()
    const second = await room.run(['run'])
    expect(second.code).toBe(75)
    expect(second.stderr).toContain(`process ${daemon.pid}`)
  })

  it('stops at the start with every fault of a wrong configuration at its place', async () => {
    const room = testRoom()
    room.write(
      'studies/aging.yaml',
      'study: aging\nspecies: chlorpentaammine\nkind: stabilty\nsamples: [ { name: "AGE-*" } ]\n',
    )
    room.write(
      'rules/bands.yaml',
      'rules:\n  - rule: r\n    title: t\n    of: sample\n    when: "nu1 > 5 h"\n    priority: high\n',
    )
    const ended = await room.run(['run'])
    expect(ended.code).toBe(78)
    expect(ended.stderr).toMatch(/aging\.yaml:3:7: /)
    expect(ended.stderr).not.toMatch(/ at .*\.js/)
  })

  it('keeps the old configuration when a changed one is refused, says so, and takes the mended one', async () => {
    const room = testRoom()
    const daemon = await room.start()
    const rules = room.read('rules/bands.yaml')
    room.write('rules/bands.yaml', rules.replace('persist: 2', 'persist: two'))
    await until('the refusal is noted', () => {
      const [note] = room.rows<{ body: string }>('SELECT body FROM daemon_state')
      return note?.body.includes('refused') === true
    })
    const refused = await room.run(['status'])
    expect(refused.code).toBe(1)
    expect(refused.stdout).toMatch(/the old one stays in force: .*bands\.yaml:\d+:\d+: /)
    room.write('rules/bands.yaml', rules.replace('persist: 2', 'persist: 3'))
    await until('the mended one is in force', () => room.rows('SELECT * FROM configurations').length === 2)
    expect((await room.run(['status'])).code).toBe(0)
    daemon.kill('SIGTERM')
    expect(await exited(daemon)).toBe(0)
  })

  it('finishes what a kill interrupted, and loses nothing', async () => {
    const room = testRoom()
    const daemon = await room.start()
    for (let i = 0; i < 20; i++) room.drop(nameAt('AGE-1', i), converted(0, i))
    await until('some are taken in', () => room.rows('SELECT * FROM intake').length > 3)
    daemon.kill('SIGKILL')
    await exited(daemon)
    expect((await room.run(['run', '--once'])).code).toBe(0)
    expect(room.rows('SELECT * FROM history')).toHaveLength(20)
    expect(room.rows('SELECT * FROM intake WHERE outcome IS NULL')).toEqual([])
  })
})
