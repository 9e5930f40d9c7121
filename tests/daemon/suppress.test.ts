import { expect, it } from 'vitest'
import type { Stations } from '../../src/daemon/pipeline.ts'
import { followCommonChanges } from '../../src/daemon/suppress.ts'
import type { StoredAlarm } from '../../src/store/alarms.ts'
import { ALARM } from '../mail/facts.ts'
import { freshStore } from '../store/room.ts'

const HOUR = 3_600_000

it('a suppressed alarm whose sample is never measured again speaks 36 hours after the common change is over, not before', () => {
  const { store } = freshStore()
  const alarm = (rule: string, of: 'sample' | 'instrument', state: StoredAlarm['state'], active: boolean): number =>
    store.alarms.put({
      ...{ rule, of, subject: of === 'sample' ? 'AGE-1' : 'uv1', study: 'aging-40', priority: 'high', state, active },
      ...{ latch: false, latched: false, shelvedUntil: null, raisedAt: 1, acknowledgedAt: null, acknowledgedBy: null },
      ...{ returnedAt: active ? null : 100 * HOUR, spectra: 1, diagnosis: null, confidence: null, message: 'moved' },
    })
  alarm('common-change', 'instrument', 'returned-unacknowledged', false)
  const suppressed = alarm('first-band-shift', 'sample', 'suppressed-by-design', true)
  store.letters.add(
    { alarm: suppressed, facts: ALARM, subject: 'x' },
    ['stability@lab.example'],
    1,
    () => '<a@lab.example>',
  )
  const config = {
    mail: { from: 'tendq@lab.example' },
    studies: [{ name: 'aging-40', tell: ['stability@lab.example'] }],
    keeper: ['keeper@lab.example'],
    dataFolder: '/var/lib/tendq',
  }
  const rules = [{ definition: { name: 'common-change', condition: { kind: 'always', rule: 'common-change' } } }]
  const at = (hour: number) =>
    followCommonChanges({ store, now: () => hour * HOUR, room: () => ({ config, rules }) } as unknown as Stations)
  at(136)
  expect(store.alarms.get(suppressed)!.state).toBe('suppressed-by-design')
  at(136.1)
  expect(store.alarms.get(suppressed)!.state).toBe('unacknowledged')
  expect(store.letters.lastTold(suppressed)!.event).toBe('re-alarmed')
  at(137)
  expect(store.letters.waitingOf(suppressed)).toHaveLength(2) // the first, and the one that it speaks again with
})
