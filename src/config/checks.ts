import type { Fault } from '../fault.ts'
import { suggestion } from '../rules/suggest.ts'
import { isLoopback, parseListen } from './network.ts'
import type { FilePart, Part, Parts } from './parse.ts'
import { halfWidthPerCm } from './positions.ts'
import { faultOfIon, faultOfRole, faultOfSpin, type Trouble } from './roles.ts'
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
    if (part.value[key] === undefined) return []
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

/** The names that parts of one kind give. */
export const namesOf = <T, K extends keyof T>(parts: readonly Part<T>[], key: K) =>
  parts.flatMap(({ value }) => (value[key] === undefined ? [] : [value[key]])) as Exclude<T[K], undefined>[]

/** Null where the name is known, or may stand in a file whose name cannot be told (`clouded`). */
export const unknownName = (kind: string, name: string, known: readonly string[], clouded: boolean): Trouble | null => {
  if (known.includes(name) || clouded) return null
  const near = suggestion(name, known)
  const list = known.length === 0 ? `there is no ${kind} at all` : `known are ${known.join(', ')}`
  return { what: `there is no ${kind} ${name}`, remedy: near === null ? list : `did you mean ${near}?` }
}

/** Mail and web page: nothing in clear text, nothing without a token, beyond this machine. */
export const checkRoom = (room: FilePart<RoomFile>): readonly Fault[] => {
  const { mail, web, quiet = [] } = room.value
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
  quiet.forEach(({ from, until }, i) => {
    if (from === until)
      add(['quiet', i, 'until'], 'quiet-hours', 'the quiet hours never end', 'write another end than the beginning')
  })
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

/** Ion, spin and roles. */
export const checkSpecies = (parts: Parts): readonly Fault[] => [
  ...doubleNames(parts.species, 'species'),
  ...parts.species.flatMap(checkOneSpecies),
]

const checkOneSpecies = (part: FilePart<SpeciesFile>): readonly Fault[] => {
  const { value } = part
  const found = (steps: Path, code: string, trouble: Trouble | null) =>
    trouble === null ? [] : [faultAt(part, steps, code, trouble)]
  const { ion, geometry, spin, bands = [], 'may-become': mayBecome = [] } = value
  const centre =
    ion === undefined || geometry === undefined || part.damaged.includes('spin') ? null : { ion, geometry, spin }
  const spinFault = centre === null ? null : faultOfSpin(centre)
  // without its spin nobody knows which roles the ion has
  const roleFault = (role: string) => (centre === null || spinFault !== null ? null : faultOfRole(role, centre))
  const roles = bands.map(({ role }) => role)
  return [
    ...found(['ion'], 'unknown-ion', ion === undefined ? null : faultOfIon(ion)),
    ...found(['spin'], 'spin', spinFault),
    ...roles.flatMap((role, i) => found(['bands', i, 'role'], 'unknown-role', roleFault(role))),
    ...roles.flatMap((role, i) =>
      roles.indexOf(role) < i
        ? found(['bands', i, 'role'], 'double-role', { what: `${role} stands twice`, remedy: 'keep one of them' })
        : [],
    ),
    ...bands.flatMap(({ near, within }, i) =>
      halfWidthPerCm(near, within) === null ? found(['bands', i, 'within'], 'band-range', TOO_WIDE) : [],
    ),
    ...mayBecome.flatMap(({ near }, i) =>
      Object.keys(near).flatMap((role) => found(['may-become', i, 'near', role], 'unknown-role', roleFault(role))),
    ),
  ]
}

const TOO_WIDE: Trouble = { what: 'the range reaches to zero', remedy: 'write how far from `near` the band may lie' }
