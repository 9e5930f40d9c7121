import { realpathSync } from 'node:fs'
import { dirname, isAbsolute, join, resolve, sep } from 'node:path'
import type { Fault } from '../fault.ts'
import { suggestion } from '../rules/suggest.ts'
import { sayPath } from './files.ts'
import { isLoopback, parseListen } from './network.ts'
import type { Part, Parts } from './parse.ts'
import { faultOfIon, faultOfRole, faultOfSpin, type Trouble } from './roles.ts'
import type { InstrumentFile } from './schemas/instrument.ts'
import type { RoomFile } from './schemas/room.ts'
import type { SpeciesFile } from './schemas/species.ts'
import type { Path } from './yamlDocument.ts'

/** A fault at the value that stands at `steps` of a part. */
export const faultAt = (part: Part<unknown>, steps: Path, code: string, { what, remedy }: Trouble): Fault => ({
  code,
  place: part.document.placeOf([...part.path, ...steps]),
  what,
  remedy,
})

/** Two parts of one kind with one name. */
export const doubleNames = <T>(parts: readonly Part<T>[], key: string & keyof T): readonly Fault[] =>
  parts.flatMap((part, i) => {
    const first = parts.slice(0, i).find(({ value }) => value[key] === part.value[key])
    if (first === undefined) return []
    const { at, line } = first.document.placeOf([...first.path, key])
    return [
      faultAt(part, [key], 'double-name', {
        what: `the ${key} ${String(part.value[key])} stands in ${at}, line ${line} already`,
        remedy: 'give one of them another name',
      }),
    ]
  })

/** Null where the name is known (or may stand in a file that has faults of its own). */
export const unknownName = (
  kind: string,
  name: string,
  known: readonly string[],
  clouded: readonly string[],
): Trouble | null => {
  if (known.includes(name) || clouded.includes(name) || clouded.includes('*')) return null
  const near = suggestion(name, known)
  const list = known.length === 0 ? `there is no ${kind} at all` : `known are ${known.join(', ')}`
  return { what: `there is no ${kind} ${name}`, remedy: near === null ? list : `did you mean ${near}?` }
}

/** Mail and web page: nothing in clear text, nothing without a token, beyond this machine. */
export const checkRoom = (room: Part<RoomFile>): readonly Fault[] => {
  const { mail, web } = room.value
  const faults: Fault[] = []
  const add = (steps: Path, code: string, what: string, remedy: string) =>
    faults.push(faultAt(room, steps, code, { what, remedy }))
  if (mail?.security === 'none' && !isLoopback(mail.host))
    add(
      ['mail', 'security'],
      'mail-in-clear',
      `letters to ${mail.host} would travel in clear text`,
      'write tls or starttls',
    )
  if (mail !== undefined && mail.password !== undefined && mail.user === undefined)
    add(
      ['mail', 'password'],
      'password-without-user',
      'a password without a user',
      'add `user:`, or delete the password',
    )
  if (mail !== undefined && mail.user !== undefined && mail.password === undefined)
    add(
      ['mail', 'user'],
      'user-without-password',
      'a user without a password',
      'say where it is kept: `password: { credential: NAME }`',
    )
  const listen = web === undefined ? null : parseListen(web.listen)
  if (listen?.kind === 'refused') add(['web', 'listen'], 'listen-address', listen.what, listen.remedy)
  if (listen?.kind === 'read' && !isLoopback(listen.host) && web?.token === undefined)
    add(
      ['web', 'listen'],
      'open-page',
      `${listen.host} can be reached by others`,
      'add `token: { file: PATH }`, or listen on 127.0.0.1',
    )
  return faults
}

/** Names, drop folders, and what is read off file names. */
export const checkInstruments = (parts: Parts, folder: string): readonly Fault[] => [
  ...doubleNames(parts.instruments, 'instrument'),
  ...parts.instruments.flatMap(checkInstrument),
  ...dropFolders(parts, folder),
]

const checkInstrument = (part: Part<InstrumentFile>): readonly Fault[] => {
  const { sample, files } = part.value
  const faults: Fault[] = []
  const trouble = sample.pattern === undefined ? null : faultOfPattern(sample.pattern, sample.from)
  if (trouble !== null) faults.push(faultAt(part, ['sample', 'pattern'], 'sample-pattern', trouble))
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
  const drops = parts.instruments.map(
    (part): Holding => ({
      part,
      step: 'drop',
      owner: part.value.instrument,
      path: trueFolder(resolve(folder, part.value.drop)),
    }),
  )
  const { room } = parts
  const data: readonly Holding[] =
    room === null
      ? []
      : [{ part: room, step: 'data', owner: 'the data folder', path: trueFolder(resolve(folder, room.value.data)) }]
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

/** Ion, spin and roles. */
export const checkSpecies = (parts: Parts): readonly Fault[] => [
  ...doubleNames(parts.species, 'species'),
  ...parts.species.flatMap(checkOneSpecies),
]

const checkOneSpecies = (part: Part<SpeciesFile>): readonly Fault[] => {
  const { value } = part
  const found = (steps: Path, code: string, trouble: Trouble | null) =>
    trouble === null ? [] : [faultAt(part, steps, code, trouble)]
  const roles = value.bands.map(({ role }) => role)
  return [
    ...found(['ion'], 'unknown-ion', faultOfIon(value.ion)),
    ...found(['spin'], 'spin', faultOfSpin(value)),
    ...roles.flatMap((role, i) => found(['bands', i, 'role'], 'unknown-role', faultOfRole(role, value))),
    ...roles.flatMap((role, i) =>
      roles.indexOf(role) < i
        ? found(['bands', i, 'role'], 'double-role', { what: `${role} stands twice`, remedy: 'keep one of them' })
        : [],
    ),
    ...value['may-become'].flatMap(({ near }, i) =>
      Object.keys(near).flatMap((role) =>
        found(['may-become', i, 'near', role], 'unknown-role', faultOfRole(role, value)),
      ),
    ),
  ]
}
