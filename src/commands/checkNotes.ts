import { accessSync, constants, statSync } from 'node:fs'
import { findIon } from '../chemistry/ions.ts'
import { ruleCovers, speciesOf } from '../config/index.ts'
import type { Config, Secret } from '../config/types.ts'

/** What is no fault, but may not be what was meant. */
export const notesOf = (config: Config): readonly string[] => [
  ...config.instruments.flatMap(({ name, dropFolder }) => faultOfFolder(name, dropFolder)),
  ...mailNotes(config),
  ...quietNotes(config),
  ...(config.web?.token ? secretNotes('the token of the web page', config.web.token) : []),
  ...config.studies.flatMap((study) => studyNotes(config, study)),
  ...ruleNotes(config),
  ...config.species
    .filter(({ name }) => !config.studies.some(({ species }) => species === name))
    .map(({ name }) => `species ${name}: no study is of it`),
]

const quietNotes = ({ quiet, keeper, studies }: Config): readonly string[] => {
  const people = new Set([...keeper, ...studies.flatMap(({ tell, escalate }) => [...tell, ...(escalate?.to ?? [])])])
  return quiet
    .filter(({ to }) => !people.has(to))
    .map(({ to }) => `quiet hours of ${to}: nobody writes to this address`)
}

const faultOfFolder = (instrument: string, folder: string): readonly string[] => {
  const found = statSync(folder, { throwIfNoEntry: false })
  if (found === undefined)
    return [`instrument ${instrument}: the folder ${folder} does not exist yet; it is watched from when it does`]
  if (!found.isDirectory()) return [`instrument ${instrument}: ${folder} is no folder`]
  return readable(folder) ? [] : [`instrument ${instrument}: this account may not read ${folder}`]
}

const readable = (path: string): boolean => {
  try {
    accessSync(path, constants.R_OK)
    return true
  } catch {
    return false
  }
}

const mailNotes = ({ mail }: Config): readonly string[] => {
  if (mail === null) return ['no mail server is named: alarms would be listed, but no letter would go out']
  return mail.password === null ? [] : secretNotes('the mail password', mail.password)
}

/** Only whether the secret can be reached from here; it is not read. */
const secretNotes = (what: string, secret: Secret): readonly string[] => {
  if ('file' in secret) return readable(secret.file) ? [] : [`${what}: ${secret.file} cannot be read by this account`]
  if ('env' in secret)
    return process.env[secret.env] ? [] : [`${what}: the environment variable ${secret.env} is not set here`]
  return process.env.CREDENTIALS_DIRECTORY === undefined
    ? [`${what}: the credential ${secret.credential} is there only when systemd starts tendq`]
    : []
}

const studyNotes = (config: Config, study: Config['studies'][number]): readonly string[] => {
  const notes: string[] = []
  const say = (text: string) => notes.push(`study ${study.name}: ${text}`)
  const species = speciesOf(config, study)
  if (study.standard !== null)
    say('its spectra are kept, but this version does not yet compare them with the certified figures')
  if (species !== null && species.bands.length === 0)
    say(`${species.name} expects no bands, so which band is which is worked out from the ion alone`)
  if (species !== null && species.bands.length === 1 && bandsMatter(species.ion))
    say(`${species.name} expects one band only: B cannot be derived from it`)
  if (study.kind === 'stability' && species !== null && !study.samples.some(({ control }) => control))
    say('it names no control sample: samples that age alike look as if the instrument had moved (common-change)')
  if (study.tell.length === 0) say('nobody is told; its alarms are only listed')
  if (
    species !== null &&
    !config.rules.some((rule) => rule.condition.kind !== 'always' && ruleCovers(rule, study.name))
  )
    say('no rule of your own judges it')
  return notes
}

const bandsMatter = (ion: string): boolean => {
  const search = findIon(ion)
  return search.kind === 'found' && [2, 3, 7, 8].includes(search.ion.d)
}

const ruleNotes = ({ rules, studies }: Config): readonly string[] =>
  rules
    .filter(({ condition }) => condition.kind === 'overdue')
    .flatMap((rule) =>
      studies
        .filter((study) => ruleCovers(rule, study.name) && study.everyMs === null && study.scheduleMs === null)
        .map((study) => `rule ${rule.name}: study ${study.name} has no schedule, so nothing of it is ever overdue`),
    )
