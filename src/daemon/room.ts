import { readFileSync } from 'node:fs'
import { join, resolve } from 'node:path'
import { parse } from 'yaml'
import { findConfigFolder, loadConfig, studyOf } from '../config/index.ts'
import type { Config, Study } from '../config/types.ts'
import { EXIT, type Fault, FaultError } from '../fault.ts'
import { compileRule } from '../rules/index.ts'
import type { CompiledRule } from '../rules/types.ts'

/** A configuration with its rules compiled: what is in force. */
export interface RoomInForce {
  readonly config: Config
  readonly rules: readonly CompiledRule[]
  /** The study that claims a sample; null when none does. */
  readonly studyOf: (sample: string) => Study | null
}

export type RoomLoaded =
  | { readonly kind: 'loaded'; readonly room: RoomInForce }
  | { readonly kind: 'refused'; readonly faults: readonly [Fault, ...Fault[]] }

/** Loads a configuration folder whole, or names every fault in it, those of the rules included. */
export const loadRoom = (folder: string): RoomLoaded => {
  const loaded = loadConfig(folder, (definition) => {
    const compilation = compileRule(definition)
    return compilation.kind === 'refused' ? compilation.faults : []
  })
  if (loaded.kind === 'refused') return loaded
  const { config } = loaded
  const rules = config.rules.flatMap((definition) => {
    const compilation = compileRule(definition)
    return compilation.kind === 'compiled' ? [compilation.rule] : []
  })
  return { kind: 'loaded', room: { config, rules, studyOf: (sample) => studyOf(config, sample) } }
}

/** For commands: the room of `--config`, or a FaultError with every fault (exit 78). */
export const roomOf = (option: string | undefined): RoomInForce => {
  const loaded = loadRoom(findConfigFolder(option))
  if (loaded.kind === 'refused') throw new FaultError(loaded.faults, EXIT.config)
  return loaded.room
}

/** Where the data lie and in which zone times are read: all that commands need which look at what is stored. */
export interface DataPlace {
  readonly dataFolder: string
  readonly timeZone: string
}

/**
 * For commands that read what is stored. A configuration that is wrong somewhere must not hide what the daemon, which
 * still runs under the old one, has to say: then tendq.yaml alone is asked. Throws every fault where that fails too.
 */
export const dataPlaceOf = (option: string | undefined): DataPlace => {
  const folder = findConfigFolder(option)
  const loaded = loadRoom(folder)
  if (loaded.kind === 'loaded') return loaded.room.config
  const place = placeFromRoomFile(folder)
  if (place === null) throw new FaultError(loaded.faults, EXIT.config)
  return place
}

const placeFromRoomFile = (folder: string): DataPlace | null => {
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
