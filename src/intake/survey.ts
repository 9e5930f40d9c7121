import { errorCode, unreadable } from './faults.ts'
import type { Folder } from './folder.ts'
import { decide } from './settle.ts'
import { type Place, type Sighting, sightings, sightingsAt } from './sight.ts'
import type { Settled } from './take.ts'
import type { IntakeOptions, IntakePorts } from './types.ts'

export interface Surveyor {
  readonly ports: IntakePorts
  readonly options: IntakeOptions
  /** Milliseconds on a clock that never jumps. */
  readonly clock: () => number
  readonly stopped: AbortSignal
}

export interface Survey {
  readonly settled: Settled[]
  files: number
  skipped: number
  unreachable: string[]
}

export const emptySurvey = (): Survey => ({ settled: [], files: 0, skipped: 0, unreachable: [] })

/** Errors that say something of this process and nothing of the folder. */
const PASSING = new Set(['EMFILE', 'ENFILE', 'ENOMEM'])

/** Takes note of one sighting: what waits, what is wrong, what has settled. */
const consider = (
  { ports, options, clock }: Surveyor,
  folder: Folder,
  place: Place,
  sighting: Sighting,
  trustTimes: boolean,
  survey: Survey,
): void => {
  if (sighting.kind === 'passed-over' || sighting.kind === 'lost') return
  const { file } = sighting
  const { name, dropFolder } = folder.instrument
  if (sighting.kind !== 'file') {
    if (sighting.kind === 'unreadable') {
      const fault = unreadable(dropFolder, file, sighting.error)
      folder.troubles.note({ file, kind: 'unreadable', fault, mark: null })
      return // what is known of it stays known
    }
    folder.waiting.delete(file)
    if (sighting.kind === 'gone') folder.troubles.mend(file, 'gone')
    else folder.troubles.note({ file, kind: 'refused', fault: sighting.fault, mark: null })
    return
  }
  const { mark } = sighting
  survey.files++
  if (folder.troubles.has(file, mark)) return
  const previous = folder.waiting.get(file) ?? null
  const now = ports.now()
  const restedMs = trustTimes && place.trustInode ? now - Math.max(mark.mtimeMs, mark.ctimeMs) : null
  // Another machine's file times and sizes may come late to a share: look again after a longer while.
  const settleMs = place.trustInode ? options.settleMs : Math.max(options.settleMs, options.checkEveryMs)
  const patience = { settleMs, giveUpMs: options.giveUpMs }
  const sight = { seen: ports.seen(name, file), previous, mark, nowMs: clock(), restedMs }
  const decision = decide(sight, patience)
  if (decision.kind === 'skip') {
    survey.skipped++
    folder.waiting.delete(file)
    folder.troubles.mend(file, 'taken')
    return
  }
  const isNew = decision.look !== previous
  const waits = decision.kind === 'wait'
  folder.waiting.set(file, {
    ...decision.look,
    dueMs: waits ? decision.untilMs : Number.POSITIVE_INFINITY,
    since: isNew || previous === null ? now : previous.since,
    why: isNew || previous === null ? 'was changed a moment ago' : previous.why,
  })
  if (decision.kind === 'read' || decision.kind === 'take')
    survey.settled.push({
      folder,
      file,
      path: sighting.path,
      look: decision.look,
      ifComplete: decision.kind === 'read',
    })
}

/** One answer at a time, so that a file system that has died in the middle is noticed. */
async function* answered(
  folder: Folder,
  source: AsyncGenerator<readonly Sighting[]>,
): AsyncGenerator<readonly Sighting[]> {
  for (;;) {
    let next: IteratorResult<readonly Sighting[]>
    try {
      next = await folder.ask(() => source.next())
    } catch (error) {
      yield [{ kind: 'lost', error }]
      return
    }
    if (next.done) return
    yield next.value
  }
}

const lose = async (folder: Folder, error: unknown, survey: Survey): Promise<void> => {
  survey.unreachable.push(folder.instrument.name)
  if (!PASSING.has(errorCode(error))) return folder.lost(error)
  const fault = unreadable(folder.instrument.dropFolder, '', error)
  folder.troubles.note({ file: '', kind: 'unreadable', fault, mark: null })
}

/** Looks at every file of a folder. Files that were known and are not there any more are forgotten. */
export const surveyAll = async (by: Surveyor, folder: Folder, trustTimes: boolean, survey: Survey): Promise<void> => {
  const began = by.clock()
  const found = await folder.check()
  if (found.kind === 'away') {
    survey.unreachable.push(folder.instrument.name)
    return
  }
  const vanished = new Set([...folder.waiting.keys(), ...folder.troubles.files()])
  let files = 0
  let passedOver = 0
  let isComplete = true
  for await (const batch of answered(folder, sightings(found.place, ''))) {
    if (by.stopped.aborted) return
    for (const sighting of batch) {
      if (sighting.kind === 'lost') return lose(folder, sighting.error, survey)
      if (sighting.kind === 'file') files++
      if (sighting.kind === 'unreadable') isComplete = false
      if (sighting.kind === 'passed-over') passedOver++
      else vanished.delete(sighting.file)
      consider(by, folder, found.place, sighting, trustTimes, survey)
    }
  }
  // Below a subfolder that could not be opened nothing is known to be gone.
  for (const file of isComplete ? vanished : []) {
    folder.waiting.delete(file)
    folder.troubles.mend(file, 'gone')
  }
  const now = by.clock()
  folder.scanned = { at: by.ports.now(), againMs: now + 9 * (now - began), files, passedOver }
}

/** Looks at single paths, files or subfolders. */
export const surveySome = async (
  by: Surveyor,
  folder: Folder,
  paths: Iterable<string>,
  trustTimes: boolean,
  survey: Survey,
): Promise<void> => {
  const found = await folder.check()
  if (found.kind === 'away') return
  if (found.appeared) return surveyAll(by, folder, trustTimes, survey)
  for (const path of paths) {
    for await (const batch of answered(folder, sightingsAt(found.place, path))) {
      if (by.stopped.aborted) return
      for (const sighting of batch) {
        if (sighting.kind === 'lost') return lose(folder, sighting.error, survey)
        consider(by, folder, found.place, sighting, trustTimes, survey)
      }
    }
  }
}
