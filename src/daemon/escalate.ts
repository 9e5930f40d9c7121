import type { AlarmFacts } from '../mail/types.ts'
import { addLetter } from './letter.ts'
import type { Stations } from './pipeline.ts'

/** Tells those whom the study names when an alarm has stood unacknowledged for too long: once an occurrence. */
export const escalate = (stations: Stations): void => {
  const { store, room, now } = stations
  store.atomically(() => {
    for (const alarm of store.alarms.standing()) {
      const study = room().config.studies.find(({ name }) => name === alarm.study)
      if (alarm.state !== 'unacknowledged' || alarm.raisedAt === null || !study?.escalate) continue
      const { afterMs, to } = study.escalate
      if (now() - alarm.raisedAt < afterMs || store.alarms.happened(alarm.id, 'escalated', alarm.raisedAt)) continue
      const facts = store.letters.lastFacts(alarm.id)
      if (facts?.kind === 'alarm') addLetter({ ...facts, event: 're-alarmed' } satisfies AlarmFacts, stations, to)
      store.alarms.event(alarm.id, now(), 'escalated', 'tendq', `nobody acknowledged it; told ${to.join(', ')}`)
    }
  })
}
