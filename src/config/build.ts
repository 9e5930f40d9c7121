import { resolve } from 'node:path'
import { findIon } from '../chemistry/ions.ts'
import { type Read, readRange, readValue } from './acceptance.ts'
import { parseListen } from './network.ts'
import { halfWidthPerCm, positionPerCm } from './positions.ts'
import { spinOf } from './roles.ts'
import type { InstrumentFile } from './schemas/instrument.ts'
import type { RoomFile } from './schemas/room.ts'
import type { SpeciesFile } from './schemas/species.ts'
import type { StandardFile } from './schemas/standard.ts'
import type { StudyFile } from './schemas/study.ts'
import type { Instrument, MailSettings, Reference, Secret, Species, Standard, Study, WebSettings } from './types.ts'

/** From files that passed every check to the types of the other rooms: units resolved, paths absolute, gaps null. */

type SecretFile = NonNullable<NonNullable<RoomFile['mail']>['password']>

const toSecret = (secret: SecretFile | undefined, folder: string): Secret | null => {
  if (secret?.credential !== undefined) return { credential: secret.credential }
  if (secret?.env !== undefined) return { env: secret.env }
  return secret?.file === undefined ? null : { file: resolve(folder, secret.file) }
}

export const toMail = (mail: RoomFile['mail'], folder: string): MailSettings | null =>
  mail === undefined
    ? null
    : {
        from: mail.from,
        host: mail.host,
        port: mail.port,
        security: mail.security,
        user: mail.user ?? null,
        password: toSecret(mail.password, folder),
      }

export const toWeb = (web: RoomFile['web'], folder: string): WebSettings | null => {
  const listen = web === undefined ? null : parseListen(web.listen)
  return listen?.kind === 'read' ? { host: listen.host, port: listen.port, token: toSecret(web?.token, folder) } : null
}

const DELIMITERS: Readonly<Record<string, string>> = { tab: '\t', space: ' ' }

export const toInstrument = (file: InstrumentFile, folder: string): Instrument => {
  const { x, medium, y, delimiter, decimal, layout } = file.reading
  return {
    name: file.instrument,
    title: file.title ?? file.instrument,
    dropFolder: resolve(folder, file.drop),
    files: file.files,
    watch: file.watch,
    reading: {
      ...(x === undefined ? {} : { x }),
      ...(medium === undefined ? {} : { medium }),
      ...(y === undefined ? {} : { y }),
      ...(layout === undefined ? {} : { layout }),
      ...(delimiter === undefined ? {} : { delimiter: DELIMITERS[delimiter] ?? delimiter }),
      ...(decimal === undefined ? {} : { decimal }),
    },
    sampleFrom: file.sample.from,
    samplePattern: file.sample.pattern ?? null,
    absorbanceLimit: file.limits.absorbance,
    wavelength: {
      repeatabilityNm: file.wavelength.repeatability,
      accuracyNm: file.wavelength.accuracy,
      bandwidthNm: file.wavelength.bandwidth,
    },
    everyMs: file.every ?? null,
  }
}

export const toSpecies = (file: SpeciesFile): Species => {
  const search = findIon(file.ion)
  return {
    name: file.species,
    title: file.title ?? file.species,
    ion: search.kind === 'found' ? search.ion.symbol : file.ion,
    geometry: file.geometry,
    spin: spinOf(file),
    state: file.state,
    ligands: file.ligands,
    bands: file.bands.map(({ role, near, within, shape, narrow }) => ({
      role,
      shape,
      narrow,
      nearPerCm: positionPerCm(near),
      withinPerCm: halfWidthPerCm(near, within) ?? positionPerCm(near),
    })),
    mayBecome: file['may-become'].map(({ ligands, cause, near }) => ({
      ligands,
      cause,
      nearPerCm: mapped(near, (_, written) => positionPerCm(written)),
    })),
  }
}

export const toStudy = (file: StudyFile): Study => ({
  name: file.study,
  title: file.title ?? file.study,
  species: file.species ?? null,
  standard: file.standard ?? null,
  kind: file.kind,
  samples: file.samples.map(({ name, control }) => ({ name, control: control ?? false })),
  temperatureC: file.conditions.temperature ?? null,
  measuredAtC: file.conditions['measured-at'] ?? null,
  pathMm: file.conditions.path ?? null,
  concentrationMolPerL: file.conditions.concentration ?? null,
  solvent: file.conditions.solvent ?? null,
  began: file.began ?? null,
  ends: file.ends ?? null,
  everyMs: file.schedule === undefined || Array.isArray(file.schedule) ? null : file.schedule.every,
  scheduleMs: Array.isArray(file.schedule) ? file.schedule : null,
  approveReference: file['approve-reference'] ?? false,
  replicatesWithinMs: file.replicates?.within ?? null,
  reference: toReference(file.reference),
  acceptance: mapped(file.acceptance, (name, { pass, look }) => ({
    pass: known(readRange(name, pass)),
    look: look === undefined ? null : known(readRange(name, look)),
  })),
  tell: file.tell,
  escalate: file.escalate === undefined ? null : { afterMs: file.escalate.after, to: file.escalate.to },
})

const toReference = ({ first, sample, values }: StudyFile['reference']): Reference => {
  if (sample !== undefined) return { kind: 'sample', sample }
  if (values !== undefined)
    return { kind: 'values', values: mapped(values, (name, pair) => known(readValue(name, pair))) }
  return { kind: 'first', occasions: first ?? 5 }
}

export const toStandard = (file: StandardFile): Standard => ({
  name: file.standard,
  title: file.title ?? file.standard,
  source: file.source,
  lines: file.lines.map((line) => ({
    nm: line.at,
    uNm: line.u ?? null,
    absorbance: line.absorbance ?? null,
    uAbsorbance: line['u-absorbance'] ?? null,
  })),
})

const mapped = <A, B>(record: Readonly<Record<string, A>>, change: (key: string, value: A) => B): Record<string, B> =>
  Object.fromEntries(Object.entries(record).map(([key, value]) => [key, change(key, value)]))

/** The checks came first: what they passed can be read. */
const known = <T>(reading: Read<T>): T => {
  if (reading.kind === 'read') return reading.value
  throw new Error(`unchecked: ${reading.what}`)
}
