import { readFileSync } from 'node:fs'
import { join, resolve } from 'node:path'
import { parse } from 'yaml'
import { findConfigFolder } from '../config/files.ts'
import { EXIT, FaultError } from '../fault.ts'

/** Where the data lie and in which zone times are read: all that commands need which look at what is stored. */
export interface DataPlace {
  readonly dataFolder: string
  readonly timeZone: string
}

/**
 * For commands that work on what is stored. They ask tendq.yaml alone: a rule that is wrong must not hide what the daemon,
 * which still runs under the old configuration, has to say; and they start in half the time. Throws a FaultError.
 */
export const dataPlaceOf = (option: string | undefined): DataPlace => {
  const folder = findConfigFolder(option)
  const place = placeFrom(folder)
  if (place !== null) return place
  const fault = {
    code: 'no-data-folder',
    place: { at: join(folder, 'tendq.yaml') },
    what: 'does not say where the data lie (`data:`)',
    remedy: '`tendq check` names every fault of the configuration',
  }
  throw new FaultError([fault], EXIT.config)
}

const placeFrom = (folder: string): DataPlace | null => {
  try {
    const room: unknown = parse(readFileSync(join(folder, 'tendq.yaml'), 'utf8'), { schema: 'failsafe' })
    if (typeof room !== 'object' || room === null) return null
    const { data, timezone } = room as { data?: unknown; timezone?: unknown }
    if (typeof data !== 'string') return null
    return { dataFolder: resolve(folder, data), timeZone: typeof timezone === 'string' ? timezone : 'UTC' }
  } catch {
    return null
  }
}
