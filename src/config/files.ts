import { existsSync, readdirSync, readFileSync, statSync } from 'node:fs'
import { join, relative, resolve } from 'node:path'
import { EXIT, type Fault, FaultError } from '../fault.ts'
import { suggestion } from '../rules/suggest.ts'

/** Folders of a configuration; each file in them holds one thing (a rules file several rules). */
export const FOLDERS = ['instruments', 'species', 'studies', 'rules', 'standards'] as const
export type Kind = 'room' | (typeof FOLDERS)[number]

/** A file of the configuration as it lies on the disk. */
export interface ConfigFile {
  readonly kind: Kind
  /** Relative to the configuration folder, with forward slashes. */
  readonly path: string
  /** As faults name it: relative to the working folder where that is shorter. */
  readonly at: string
  readonly text: string
}

export interface FolderReading {
  /** In the order of their paths. */
  readonly files: readonly ConfigFile[]
  readonly faults: readonly Fault[]
}

const MOST_BYTES = 1_000_000

/**
 * The configuration folder that is meant: `--config`, else $TENDQ_CONFIG, else ./config, else /etc/tendq. Throws a
 * FaultError (exit 78) that says where it looked.
 */
export const findConfigFolder = (option: string | undefined): string => {
  const named = option ?? (process.env.TENDQ_CONFIG || undefined)
  const places = (named === undefined ? ['config', '/etc/tendq'] : [named]).map((place) => resolve(place))
  const found = places.find((place) => existsSync(place) && statSync(place).isDirectory())
  if (found !== undefined) return found
  const at = option !== undefined ? '--config' : named !== undefined ? 'TENDQ_CONFIG' : 'configuration'
  const fault: Fault = {
    code: 'no-configuration',
    place: { at },
    what: `there is no folder ${places.join(', nor ')}`,
    remedy: 'name the folder with --config, or write a starting configuration with `tendq init DIR`',
  }
  throw new FaultError([fault], EXIT.config)
}

/** All YAML files of a configuration folder; a YAML file where none is looked for is a fault, never overlooked. */
export const readFolder = (folder: string): FolderReading => {
  const paths = yamlPaths(folder)
  if ('code' in paths) return { files: [], faults: [paths] }
  const faults: Fault[] = []
  const files: ConfigFile[] = []
  for (const path of paths) {
    const at = sayPath(join(folder, path))
    const kind = kindOf(path)
    const outcome = kind === null ? misplaced(path, at) : readOne(join(folder, path), at)
    if (typeof outcome === 'string') files.push({ kind: kind!, path, at, text: outcome })
    else faults.push(outcome)
  }
  if (!files.some(({ kind }) => kind === 'room') && !faults.some(({ place }) => place.at.endsWith('tendq.yaml')))
    faults.push({
      code: 'missing-file',
      place: { at: sayPath(join(folder, 'tendq.yaml')) },
      what: 'there is no such file, and it names the room and the data folder',
      remedy: 'write it, or start from `tendq init DIR`',
    })
  return { files, faults }
}

/** Rules from elsewhere: a file, or the YAML files of a folder (a configuration folder's `rules`). */
export const readRules = (place: string): FolderReading => {
  const path = resolve(place)
  const at = sayPath(path)
  const isFolder = statSync(path, { throwIfNoEntry: false })?.isDirectory() === true
  const folder = isFolder && existsSync(join(path, 'rules')) ? join(path, 'rules') : path
  const listed = isFolder ? yamlPaths(folder) : ['']
  if ('code' in listed) return { files: [], faults: [listed] }
  const names = listed.filter((name) => !name.includes('/'))
  if (names.length === 0)
    return {
      files: [],
      faults: [{ code: 'no-rules', place: { at }, what: 'the folder holds no YAML file', remedy: 'name another one' }],
    }
  const read = names.map((name) => ({
    name,
    file: join(folder, name),
    outcome: readOne(join(folder, name), sayPath(join(folder, name))),
  }))
  return {
    files: read.flatMap(({ name, file, outcome }) =>
      typeof outcome === 'string'
        ? [{ kind: 'rules' as const, path: `rules/${name}`, at: sayPath(file), text: outcome }]
        : [],
    ),
    faults: read.flatMap(({ outcome }) => (typeof outcome === 'string' ? [] : [outcome])),
  }
}

/** A path as a person would type it here. */
export const sayPath = (path: string): string => {
  const near = relative(process.cwd(), path)
  return near === '' || near.startsWith('..') ? path : near
}

/** Hidden files and editors' copies (`uv1.yaml~`) are no configuration. */
const yamlPaths = (folder: string): readonly string[] | Fault => {
  const list = (at: string) => readdirSync(join(folder, at)).filter((name) => !name.startsWith('.'))
  const isFolder = (path: string) => statSync(join(folder, path), { throwIfNoEntry: false })?.isDirectory() === true
  try {
    return list('')
      .flatMap((name) => (isFolder(name) ? list(name).map((inner) => `${name}/${inner}`) : [name]))
      .filter((path) => /\.ya?ml$/i.test(path) && !isFolder(path))
      .sort((a, b) => (a < b ? -1 : 1))
  } catch (error) {
    const { code, path = folder } = error as NodeJS.ErrnoException
    return {
      code: 'unreadable-folder',
      place: { at: sayPath(path) },
      what: `the folder cannot be read (${code})`,
      remedy: 'see that it is there and that the account of tendq may read it',
    }
  }
}

const kindOf = (path: string): Kind | null => {
  if (path === 'tendq.yaml') return 'room'
  const folder = FOLDERS.find((name) => path.startsWith(`${name}/`))
  return folder !== undefined && path.endsWith('.yaml') ? folder : null
}

const misplaced = (path: string, at: string): Fault => {
  const [folder, inner] = path.split('/') as [string, string | undefined]
  const fault = (what: string, remedy: string): Fault => ({ code: 'misplaced-file', place: { at }, what, remedy })
  if (!path.endsWith('.yaml') && (inner === undefined || (FOLDERS as readonly string[]).includes(folder)))
    return fault('a configuration file ends in .yaml', 'rename it')
  const near = inner === undefined ? null : suggestion(folder, FOLDERS)
  if (near !== null) return fault(`nothing is read from a folder ${folder}`, `did you mean ${near}?`)
  return fault('nothing is read from here', `put it into ${FOLDERS.join(', ')}, or take it out`)
}

const readOne = (path: string, at: string): string | Fault => {
  const fault = (what: string, remedy: string): Fault => ({ code: 'unreadable-file', place: { at }, what, remedy })
  try {
    const bytes = readFileSync(path)
    if (bytes.length > MOST_BYTES) return fault('the file is larger than 1 MB', 'split it, or take it out')
    return new TextDecoder('utf-8', { fatal: true }).decode(bytes)
  } catch (error) {
    if (error instanceof TypeError) return fault('the file is not UTF-8 text', 'save it as UTF-8')
    return fault(
      `it cannot be read (${(error as NodeJS.ErrnoException).code})`,
      'let the account of the daemon read it',
    )
  }
}
