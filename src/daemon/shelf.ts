import { stepAlarm } from '../alarms/index.ts'
import { lifeOf, withLife } from '../store/alarms.ts'
import { addLetter } from './letter.ts'
import type { Stations } from './pipeline.ts'

/** Shelving has an end: an alarm whose time is over comes back by itself, and is told again if its condition stands. */
export const unshelveWhatIsDue = (stations: Stations): void => {
  const { store, now } = stations
  store.atomically(() => {
    const at = now()
    for (const alarm of store.alarms.standing()) {
      if (alarm.state !== 'shelved' || alarm.shelvedUntil === null || alarm.shelvedUntil > at) continue
      const step = stepAlarm(lifeOf(alarm), 'unshelve', 1)
      if (step.kind === 'refused') continue
      store.alarms.put(withLife(alarm, step.life))
      store.alarms.event(alarm.id, at, 'unshelved', 'tendq', 'the time of its shelving is over')
      const facts = step.life.active ? store.letters.lastFacts(alarm.id) : null
      if (facts?.kind === 'alarm') addLetter({ ...facts, event: 're-alarmed' }, stations)
    }
  })
}
