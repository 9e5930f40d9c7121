import { createHash } from 'node:crypto'
import { resolve } from 'node:path'
import type { Fault } from '../fault.ts'
import { toInstrument, toMail, toSpecies, toStandard, toStudy, toWeb } from './build.ts'
import { toRules } from './buildRules.ts'
import { checkInstruments } from './checkInstruments.ts'
import { checkRules } from './checkRules.ts'
import { checkStudies } from './checkStudies.ts'
import { checkRoom, checkSpecies, doubleNames } from './checks.ts'
import { type ConfigFile, type FolderReading, readFolder, readRules, sayPath } from './files.ts'
import { byPlace } from './issues.ts'
import { type FilePart, type Parts, parseFiles } from './parse.ts'
import type { RoomFile } from './schemas/room.ts'
import type { Config, RuleDefinition } from './types.ts'

export type ConfigLoaded =
  | { readonly kind: 'loaded'; readonly config: Config }
  | { readonly kind: 'refused'; readonly faults: readonly [Fault, ...Fault[]] }

/** What the room of rules finds wrong in a rule's expressions. */
export type JudgeRule = (rule: RuleDefinition) => readonly Fault[]

export interface LoadOptions {
  /** A file or folder whose rules take the place of the folder's own. */
  readonly rulesFrom?: string | null
}

/**
 * Reads a configuration folder whole: either everything is right and frozen, or every fault is named at its place. The
 * expressions of the rules are kept as text with their places; with `judgeRule`, what is wrong in them is told together
 * with everything else.
 */
export const loadConfig = (
  folder: string,
  judgeRule: JudgeRule = () => [],
  { rulesFrom = null }: LoadOptions = {},
): ConfigLoaded => {
  const root = resolve(folder)
  const { files, faults: unread } = rulesFrom === null ? readFolder(root) : withRulesFrom(rulesFrom, readFolder(root))
  const gone = unread.find(({ code }) => code === 'unreadable-folder')
  if (gone !== undefined) return { kind: 'refused', faults: [gone] }
  const parts = parseFiles(files)
  const rules = toRules(parts.rules, { at: sayPath(resolve(root, 'rules')) })
  const faults = [...unread, ...parts.faults, ...checkAll(parts, root), ...rules.flatMap(judgeRule)].sort(byPlace)
  if (faults.length > 0 || parts.room === null) return { kind: 'refused', faults: faults as [Fault, ...Fault[]] }
  return { kind: 'loaded', config: deepFreeze({ ...build(parts, parts.room, files, root), rules }) }
}

/** The folder's own rules, and what is wrong in them, do not count. */
const withRulesFrom = (place: string, own: FolderReading): FolderReading => {
  const rules = readRules(place)
  const elsewhere = own.files.filter(({ kind }) => kind !== 'rules')
  return { files: [...elsewhere, ...rules.files], faults: [...own.faults, ...rules.faults] }
}

const checkAll = (parts: Parts, root: string): readonly Fault[] => [
  ...(parts.room === null ? [] : checkRoom(parts.room)),
  ...checkInstruments(parts, root),
  ...checkSpecies(parts),
  ...checkStudies(parts),
  ...checkRules(parts),
  ...doubleNames(parts.standards, 'standard'),
  ...(parts.instruments.length > 0 || parts.clouded.has('instruments') ? [] : [noInstrument(root)]),
]

const noInstrument = (root: string): Fault => ({
  code: 'no-instrument',
  place: { at: sayPath(resolve(root, 'instruments')) },
  what: 'there is no instrument, so nothing would be watched',
  remedy: 'write instruments/NAME.yaml',
})

/** Without faults no part lacks a key that its schema demands. */
const whole = <T>(part: FilePart<T>): T => part.value as T

const build = (
  parts: Parts,
  file: FilePart<RoomFile>,
  files: readonly ConfigFile[],
  root: string,
): Omit<Config, 'rules'> => {
  const text = textOf(files)
  const room = whole(file)
  return {
    folder: root,
    sha256: createHash('sha256').update(text).digest('hex'),
    text,
    room: room.room,
    dataFolder: resolve(root, room.data),
    timeZone: room.timezone,
    keeper: room.keeper,
    dailyAt: room.daily,
    quiet: room.quiet,
    mail: toMail(room.mail, root),
    web: toWeb(room.web, root),
    instruments: parts.instruments.map((part) => toInstrument(whole(part), root)),
    species: parts.species.map((part) => toSpecies(whole(part))),
    studies: parts.studies.map((part) => toStudy(whole(part))),
    standards: parts.standards.map((part) => toStandard(whole(part))),
  }
}

/** All files in the order of their paths, each under a line that names it. Secrets are only referred to, so none is in it. */
const textOf = (files: readonly ConfigFile[]): string =>
  files.map(({ path, text }) => `# file: ${path}\n${text}${text.endsWith('\n') ? '' : '\n'}`).join('')

const deepFreeze = <T>(value: T): T => {
  if (typeof value !== 'object' || value === null || Object.isFrozen(value)) return value
  for (const inner of Object.values(value)) deepFreeze(inner)
  return Object.freeze(value)
}
