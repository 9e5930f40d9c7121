import { findConfigFolder, type LoadOptions, loadConfig, studyOf } from '../config/index.ts'
import type { Config, RuleDefinition, Study } from '../config/types.ts'
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
export const loadRoom = (folder: string, options: LoadOptions = {}): RoomLoaded => {
  const judgeRule = (definition: RuleDefinition) => {
    const compilation = compileRule(definition)
    return compilation.kind === 'refused' ? compilation.faults : []
  }
  const loaded = loadConfig(folder, judgeRule, options)
  if (loaded.kind === 'refused') return loaded
  const { config } = loaded
  const rules = config.rules.flatMap((definition) => {
    const compilation = compileRule(definition)
    return compilation.kind === 'compiled' ? [compilation.rule] : []
  })
  return { kind: 'loaded', room: { config, rules, studyOf: (sample) => studyOf(config, sample) } }
}

/** For commands: the room of `--config`, or a FaultError with every fault (exit 78). */
export const roomOf = (option: string | undefined, options: LoadOptions = {}): RoomInForce => {
  const loaded = loadRoom(findConfigFolder(option), options)
  if (loaded.kind === 'refused') throw new FaultError(loaded.faults, EXIT.config)
  return loaded.room
}
