import { alarmList } from './alarms.ts'
import { analyses } from './analyses.ts'
import { arrivals } from './arrivals.ts'
import { dailyLetters } from './daily.ts'
import { decisions } from './decisions.ts'
import { departures } from './departures.ts'
import { judgements } from './judgements.ts'
import { letters } from './letters.ts'
import type { Db } from './open.ts'
import { recipes } from './recipes.ts'
import { records } from './records.ts'
import { spectra } from './spectra.ts'

/** Everything that is asked of the database, by subject. One connection, one thread. */
export const storeOn = (db: Db) => ({
  arrivals: arrivals(db),
  spectra: spectra(db),
  recipes: recipes(db),
  analyses: analyses(db),
  judgements: judgements(db),
  departures: departures(db),
  alarms: alarmList(db),
  letters: letters(db),
  daily: dailyLetters(db),
  records: records(db),
  decisions: decisions(db),
  /** All or nothing, and the write lock from the first statement on. */
  atomically: <T>(work: () => T): T => db.transaction(work).immediate(),
  close: (): void => {
    db.close()
  },
})

export type Store = ReturnType<typeof storeOn>

export { holdDataFolder, whoHolds } from './lock.ts'
export { type Db, databaseFile, openStore, openStoreBeside, openStoreReadOnly } from './open.ts'
