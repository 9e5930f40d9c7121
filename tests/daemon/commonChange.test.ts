import { describe, expect, it } from 'vitest'
import { decodeHeader, headersOf, partOf } from '../mail/mailbox.ts'
import { mailReceiver, spectrumText, type TestRoom, testRoom } from './house.ts'

/** Both bands moved by as many nm, as a wavelength axis that slips would do, and the first one by `own` cm⁻¹ besides. */
const shifted = (nm: number, seed: number, own = 0): string => {
  const by = (perCm: number) => 1e7 / (1e7 / perCm + nm)
  return spectrumText({
    bands: [
      [by(19531) + own, 3500, 0.45],
      [by(26667), 3900, 0.47],
    ],
    seed,
  })
}

const SAMPLES = ['AGE-1', 'AGE-2', 'AGE-3', 'AGE-4']
let seed = 0

const drop = (room: TestRoom, samples: readonly string[], hour: number, nm: number, own = 0): void => {
  for (const sample of samples) {
    const time = `${String(hour % 24).padStart(2, '0')}0${SAMPLES.indexOf(sample)}`
    room.drop(`${sample}_2026030${2 + Math.floor(hour / 24)}T${time}.csv`, shifted(nm, ++seed, own))
  }
}

const subjectsOf = (letters: readonly string[]) => letters.map((raw) => decodeHeader(headersOf(raw).get('subject')!))

describe('samples that moved together', () => {
  it('are one alarm; who departs rings by itself; letters not yet sent are withdrawn, and those sent get a follow-up', async () => {
    const mail = await mailReceiver()
    const room = testRoom(mail.port)
    room.write(
      'studies/aging.yaml',
      room
        .read('studies/aging.yaml')
        .replace('first: 3', 'values: { nu1: [ 19531 cm^-1, 5 cm^-1 ], nu2: [ 26667 cm^-1, 5 cm^-1 ] }'),
    )
    room.write('rules/bands.yaml', room.read('rules/bands.yaml').replace('persist: 2', 'persist: 1'))
    const standing = () =>
      room.rows<{ subject: string }>(`SELECT subject FROM alarm_list WHERE state = 'unacknowledged' ORDER BY subject`)
    drop(room, SAMPLES, 6, 0)
    await room.run(['run', '--once'])
    drop(room, ['AGE-1'], 12, 3)
    await room.run(['run', '--once'])
    expect(subjectsOf(mail.letters)).toHaveLength(1)
    expect(subjectsOf(mail.letters)[0]).toContain('AGE-1: First band has moved')

    // the second rings by itself as well, before the third shows that it is the instrument; the mail server is down
    await mail.stop()
    drop(room, ['AGE-2', 'AGE-3', 'AGE-4'], 12, 3)
    await room.run(['run', '--once'])
    expect(standing()).toEqual([{ subject: 'uv1' }])
    expect(room.rows(`SELECT * FROM alarm_list WHERE state = 'suppressed-by-design'`)).toHaveLength(4)
    const [common] = room.rows<{ id: number; diagnosis: string }>(
      `SELECT id, diagnosis FROM alarm_list WHERE rule = 'common-change'`,
    )
    expect(common!.diagnosis).toBe('wavelength')
    expect(room.rows(`SELECT recipient FROM letters WHERE state = 'withdrawn'`)).toEqual([
      { recipient: 'stability@lab.example' },
    ])
    const back = await mailReceiver(mail.port)
    room.hurry()
    await room.run(['run', '--once'])
    const told = subjectsOf(back.letters)
    expect(told.filter((subject) => subject.includes('AGE-1: explained by a common change'))).toHaveLength(1)
    expect(told.filter((subject) => subject.includes('uv1: Samples moved together'))).toHaveLength(2) // keeper and study
    expect(told).toHaveLength(3)
    const letter = back.letters.find((raw) => raw.includes('uv1=3A_Samples'))!
    const text = partOf(letter, 'text/plain').replace(/\s+/g, ' ')
    expect(text).toMatch(/common shift of ν1 0 nm (2\.[89]|3\.[01])\d+ ± 0\.\d+ nm/)
    for (const sample of SAMPLES) expect(text).toMatch(new RegExp(`alarm \\d+, ${sample}: First band has moved`))
    expect(text).toContain('Your safety data sheet and local rules come first.')
    expect((await room.run(['alarms', 'show', String(common!.id)])).stdout).toMatch(
      /suppresses +tendq +alarm \d+, AGE-3/,
    )

    drop(room, ['AGE-1', 'AGE-3', 'AGE-4'], 18, 3)
    drop(room, ['AGE-2'], 18, 3, 200)
    await room.run(['run', '--once'])
    expect(standing()).toEqual([{ subject: 'AGE-2' }, { subject: 'uv1' }])

    // the axis is put right: everything returns, and only what people had heard of is told
    const before = back.letters.length
    drop(room, SAMPLES, 24, 0)
    await room.run(['run', '--once'])
    expect(standing()).toEqual([])
    expect(room.rows(`SELECT * FROM alarm_list WHERE state = 'suppressed-by-design'`)).toEqual([])
    expect(subjectsOf(back.letters.slice(before)).every((subject) => subject.includes('back to normal'))).toBe(true)
  }, 60_000)
})
