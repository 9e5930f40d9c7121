import { describe, expect, it } from 'vitest'
import { historyOf, historyOn, rowsOfInstrument } from '../../src/commands/rehearseHistory.ts'
import { replayInstrument, replaySample } from '../../src/rehearsal/replay.ts'
import type { WouldBeAlarm } from '../../src/rehearsal/types.ts'
import { openStoreReadOnly } from '../../src/store/index.ts'
import { type Bench, bench, scatter, timeOf } from './bench.ts'

const RULES = `rules:
  - rule: first-band-shift
    title: First band has moved
    when: "abs(nu1 - reference(nu1)) > max(4 * sqrt(u(nu1)^2 + u_reference(nu1)^2), 60 cm^-1)"
    clear: "abs(nu1 - reference(nu1)) < 30 cm^-1"
    persist: 2
    priority: high
  - rule: jump
    title: Jump between occasions
    when: "abs(nu1 - previous(nu1)) > 50 cm^-1"
  - rule: slow-drift
    title: Slow drift
    chart: { kind: cusum, of: nu1, k: 0.5, h: 5 }
  - rule: average
    title: Average of the newest four
    when: "abs(mean(nu1, 4) - reference(nu1)) > 45 cm^-1"
    latch: true
  - rule: colour
    title: Absorbance at one wavelength
    when: "abs(absorbance(480 nm) - reference(absorbance(480 nm))) > 0.01"
  - rule: restless
    title: The instrument measures different things
    of: instrument
    when: "abs(nu1 - previous(nu1)) > 100 cm^-1"
    persist: 2
`

const STUDY = `study: aging
species: chloropentaammine
kind: stability
samples: [ { name: "AGE-*" } ]
conditions: { path: 10 mm }
replicates: { within: 15 min }
reference: { first: 3 }
tell: [ stability@lab.example ]
`

interface Event {
  rule: string
  subject: string
  event: string
  at: number
}

/** What the daemon wrote down of its alarms; its clock stood at the time of each measurement. */
const daemonSaid = ({ room }: Bench): readonly string[] =>
  room
    .rows<Event>(
      `SELECT a.rule, a.subject, e.event, e.at FROM alarm_event e JOIN alarm a ON a.id = e.alarm
        WHERE e.event IN ('raised', 'returned')`,
    )
    .map(({ rule, subject, event, at }) => `${new Date(at).toISOString()} ${subject} ${rule} ${event}`)
    .sort()

const rehearsalSays = (alarms: readonly WouldBeAlarm[]): readonly string[] =>
  alarms
    .flatMap(({ rule, subject, raisedAt, clearedAt }) => [
      `${new Date(raisedAt).toISOString()} ${subject} ${rule} raised`,
      ...(clearedAt === null ? [] : [`${new Date(clearedAt).toISOString()} ${subject} ${rule} returned`]),
    ])
    .sort()

const rehearsed = ({ room, inForce }: Bench): readonly WouldBeAlarm[] => {
  const db = openStoreReadOnly(room.data)
  try {
    const history = historyOn(db)
    const samples = [...new Set(history.replay.places().map(({ sample }) => sample))]
    const instrument = inForce.config.instruments[0]!
    return [
      ...samples.flatMap(
        (sample) => replaySample(historyOf(sample, Infinity, inForce, history)!.history, inForce.rules).alarms,
      ),
      ...replayInstrument(
        {
          instrument: instrument.name,
          medium: 'air',
          studyOf: (sample) => inForce.studyOf(sample)?.name ?? null,
          rows: rowsOfInstrument(instrument, Infinity, inForce, history),
        },
        inForce.rules,
      ).alarms,
    ]
  } finally {
    db.close()
  }
}

describe('a rehearsal of the rules that were in force', () => {
  it('raises and clears what the daemon raised and cleared, at the same spectra', async () => {
    const one = bench({ 'rules/bands.yaml': RULES, 'studies/aging.yaml': STUDY })
    const noise = scatter(3)
    const path: Readonly<Record<string, (n: number) => number>> = {
      'AGE-STEADY': () => 0,
      'AGE-DRIFT': (n) => 9 * Math.max(0, n - 5),
      'AGE-THERE-AND-BACK': (n) => (n > 5 && n < 11 ? 120 : n > 13 ? 80 : 0),
      'AGE-SLOPE': (n) => 60 * n,
    }
    for (let n = 0; n < 18; n++)
      for (const [i, [sample, movedAt]] of Object.entries(path).entries()) {
        const at = timeOf(n) + i * 1_200_000
        await one.measure(sample, at, movedAt(n) + 2 * noise())
        // now and then a replicate ten minutes later, also within the reference
        if ((n + i) % 4 === 0) await one.measure(sample, at + 600_000, movedAt(n) + 2 * noise())
      }
    const said = daemonSaid(one)
    expect(rehearsalSays(rehearsed(one))).toEqual(said)
    for (const rule of ['first-band-shift', 'jump', 'slow-drift', 'average', 'colour', 'restless', 'unjudged'])
      expect(
        said.some((line) => line.includes(rule)),
        rule,
      ).toBe(true)
    expect(said.filter((line) => line.includes('returned')).length).toBeGreaterThan(4)
  })

  it('holds to what people decided: excluded spectra are out, an approved reference counts', async () => {
    const one = bench({ 'rules/bands.yaml': RULES, 'studies/aging.yaml': STUDY })
    for (let n = 0; n < 8; n++) await one.measure('AGE-1', timeOf(n), n === 5 || n === 6 ? 150 : Math.min(15 * n, 30))
    expect(rehearsalSays(rehearsed(one)).filter((line) => line.includes('first-band-shift'))).toEqual([])
    const freeze = (spectra: number[]) => one.store.recipes.freezeReference('AGE-1', 'uv1', spectra, timeOf(8), 1)
    one.store.records.decide(timeOf(8), 'Ines', 'approve-reference', 'sample AGE-1', 'the cell was warming up')
    freeze([1, 2, 3])
    const approved = rehearsalSays(rehearsed(one)).filter((line) => line.includes('first-band-shift'))
    expect(approved).toEqual([
      `${new Date(timeOf(6)).toISOString()} AGE-1 first-band-shift raised`,
      `${new Date(timeOf(7)).toISOString()} AGE-1 first-band-shift returned`,
    ])
    one.store.records.decide(timeOf(9), 'Ines', 'exclude', 'spectrum 7', 'an empty cell')
    expect(rehearsalSays(rehearsed(one)).filter((line) => line.includes('first-band-shift'))).toEqual([])
  })
})
