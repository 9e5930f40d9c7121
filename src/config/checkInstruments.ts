import { realpathSync } from 'node:fs'
import { dirname, isAbsolute, join, resolve, sep } from 'node:path'
import type { Fault } from '../fault.ts'
import { doubleNames, faultAt } from './checks.ts'
import { sayPath } from './files.ts'
import type { FilePart, Part, Parts } from './parse.ts'
import type { Trouble } from './roles.ts'
import type { InstrumentFile } from './schemas/instrument.ts'

/** Names, drop folders, and what is read off file names. */
export const checkInstruments = (parts: Parts, folder: string): readonly Fault[] => [
  ...doubleNames(parts.instruments, 'instrument'),
  ...parts.instruments.flatMap(checkInstrument),
  ...dropFolders(parts, folder),
]

const checkInstrument = (part: FilePart<InstrumentFile>): readonly Fault[] => {
  const { sample = { from: 'filename' }, files = '' } = part.value
  const faults: Fault[] = []
  const trouble = sample.pattern === undefined ? null : faultOfPattern(sample.pattern, sample.from)
  if (trouble !== null) faults.push(faultAt(part, ['sample', 'pattern'], 'sample-pattern', trouble))
  const { delimiter, decimal } = part.value.reading ?? {}
  if (delimiter === ',' && decimal === ',')
    faults.push(
      faultAt(part, ['reading', 'decimal'], 'reading', {
        what: 'the comma cannot both part columns and mark decimals',
        remedy: 'mend `delimiter` or `decimal`',
      }),
    )
  if (isAbsolute(files) || files.split('/').includes('..'))
    faults.push(
      faultAt(part, ['files'], 'files-pattern', {
        what: `"${files}" leads out of the drop folder`,
        remedy: 'write a pattern relative to the drop folder, such as **/*.csv',
      }),
    )
  return faults
}

const faultOfPattern = (pattern: string, from: string): Trouble | null => {
  if (from === 'header')
    return {
      what: 'a pattern, but the name is read from the header',
      remedy: 'delete the pattern, or write from: filename',
    }
  try {
    new RegExp(pattern, 'u')
  } catch (error) {
    return { what: `no regular expression (${(error as Error).message})`, remedy: 'mend it' }
  }
  return pattern.includes('(?<sample>')
    ? null
    : {
        what: 'the pattern has no group (?<sample>…)',
        remedy: "put the part that is the sample's name into (?<sample>…)",
      }
}

interface Holding {
  readonly part: Part<unknown>
  readonly step: string
  readonly owner: string
  readonly path: string
}

/** One file must be one instrument's, and the database must not lie among what is watched. */
const dropFolders = (parts: Parts, folder: string): readonly Fault[] => {
  const holding = (
    part: Part<unknown>,
    step: string,
    owner: string,
    written: string | undefined,
  ): readonly Holding[] =>
    written === undefined ? [] : [{ part, step, owner, path: trueFolder(resolve(folder, written)) }]
  const drops = parts.instruments.flatMap((part) =>
    holding(part, 'drop', part.value.instrument ?? 'another instrument', part.value.drop),
  )
  const { room } = parts
  const data = room === null ? [] : holding(room, 'data', 'the room (its data)', room.value.data)
  const all = [...data, ...drops]
  return drops.flatMap((one) =>
    all
      .slice(0, all.indexOf(one))
      .filter((other) => one.path === other.path || inside(one.path, other.path) || inside(other.path, one.path))
      .map((other) => faultAt(one.part, [one.step], 'drop-folder', overlap(one, other))),
  )
}

const overlap = (one: Holding, other: Holding): Trouble => ({
  what:
    one.path === other.path
      ? `${sayPath(one.path)} is the folder of ${other.owner} too`
      : inside(one.path, other.path)
        ? `${sayPath(one.path)} lies inside ${sayPath(other.path)} of ${other.owner}`
        : `${sayPath(one.path)} holds ${sayPath(other.path)} of ${other.owner}`,
  remedy: 'give each a folder of its own, side by side',
})

const inside = (inner: string, outer: string): boolean => inner.startsWith(outer.endsWith(sep) ? outer : outer + sep)

/** With symbolic links followed as far as the folder exists. */
const trueFolder = (path: string): string => {
  try {
    return realpathSync(path)
  } catch {
    const above = dirname(path)
    return above === path ? path : join(trueFolder(above), path.slice(above.length))
  }
}
