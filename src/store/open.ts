import { mkdirSync, readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import { EXIT, FaultError } from '../fault.ts'

export type Db = Database.Database

/** `TDQ1` in ASCII: marks the file as this project's own. */
const APPLICATION_ID = 0x54445131

const SCHEMA = new URL('./schema/', import.meta.url)

/** Rows of these tables are only ever added. */
const APPEND_ONLY = [
  'configuration',
  'content',
  'arrival',
  'arrival_outcome',
  'spectrum',
  'recipe',
  'recipe_choice',
  'analysis',
  'reference_set',
  'judgement',
  'departure',
  'alarm_event',
  'decision',
  'decision_followed',
  'reassignment',
  'out_of_service',
  'return_to_service',
  'letter',
  'daily_letter',
] as const

const KEY_OF: Readonly<Record<string, string>> = {
  configuration: 'sha256',
  content: 'sha256',
  recipe: 'sha256',
  decision_followed: 'decision',
  daily_letter: 'day',
}

export const databaseFile = (dataFolder: string): string => join(dataFolder, 'tendq.db')

/** Opens the database for writing, brings it to this version's schema, and makes the views. Throws FaultError. */
export const openStore = (dataFolder: string): Db => {
  const file = databaseFile(dataFolder)
  return guarded(file, () => {
    mkdirSync(dataFolder, { recursive: true, mode: 0o750 })
    const db = new Database(file, { timeout: 10_000 })
    db.pragma('journal_mode = WAL')
    db.pragma('synchronous = FULL') // WAL alone would lower it, and a commit could be undone by a power cut
    db.pragma('foreign_keys = ON')
    db.pragma('journal_size_limit = 67108864')
    db.transaction(() => migrate(db, file)).immediate()
    return db
  })
}

/** Opens for a person's commands: short immediate transactions beside a running daemon. The database must exist. */
export const openStoreBeside = (dataFolder: string): Db => {
  const file = databaseFile(dataFolder)
  return guarded(file, () => {
    const db = new Database(file, { fileMustExist: true, timeout: 10_000 })
    checkOwn(db, file)
    db.pragma('synchronous = FULL')
    db.pragma('foreign_keys = ON')
    return db
  })
}

/** Opens for reading only. The database must exist. */
export const openStoreReadOnly = (dataFolder: string): Db => {
  const file = databaseFile(dataFolder)
  return guarded(file, () => {
    const db = new Database(file, { readonly: true, fileMustExist: true, timeout: 10_000 })
    checkOwn(db, file)
    return db
  })
}

const migrations = (): readonly { readonly version: number; readonly sql: string }[] =>
  readdirSync(SCHEMA)
    .filter((name) => /^\d{4}-.*\.sql$/.test(name))
    .sort()
    .map((name) => ({ version: Number(name.slice(0, 4)), sql: readFileSync(new URL(name, SCHEMA), 'utf8') }))

const migrate = (db: Db, file: string): void => {
  const have = db.pragma('user_version', { simple: true }) as number
  const steps = migrations()
  const newest = steps.at(-1)?.version ?? 0
  if (have > 0) checkOwn(db, file)
  if (have > newest) throw tooNew(file, have, newest)
  for (const { version, sql } of steps) {
    if (version <= have) continue
    db.exec(sql)
    db.pragma(`user_version = ${version}`)
  }
  db.pragma(`application_id = ${APPLICATION_ID}`)
  db.exec(readFileSync(new URL('views.sql', SCHEMA), 'utf8'))
  for (const table of APPEND_ONLY) db.exec(refusals(table))
}

/** Triggers also stop `INSERT OR REPLACE`, which plain UPDATE and DELETE triggers let pass. */
const refusals = (table: string): string => {
  const key = KEY_OF[table] ?? 'id'
  const refuse = `BEGIN SELECT RAISE(ABORT, '${table}: rows are only added, never changed or deleted'); END;`
  return `
    CREATE TRIGGER IF NOT EXISTS ${table}_no_update BEFORE UPDATE ON ${table} ${refuse}
    CREATE TRIGGER IF NOT EXISTS ${table}_no_delete BEFORE DELETE ON ${table} ${refuse}
    CREATE TRIGGER IF NOT EXISTS ${table}_no_replace BEFORE INSERT ON ${table}
      WHEN EXISTS (SELECT 1 FROM ${table} WHERE ${key} = NEW.${key}) ${refuse}`
}

const checkOwn = (db: Db, file: string): void => {
  if (db.pragma('application_id', { simple: true }) !== APPLICATION_ID)
    throw storeFault(file, 'not-own', 'is no database of tendq', 'name another data folder in tendq.yaml', EXIT.config)
}

const tooNew = (file: string, have: number, newest: number): FaultError =>
  storeFault(
    file,
    'schema-too-new',
    `has schema ${have}, this version knows ${newest}`,
    'run the version that wrote it, or restore the copy made before the upgrade',
    EXIT.config,
  )

const storeFault = (file: string, code: string, what: string, remedy: string, exit: FaultError['exit']): FaultError =>
  new FaultError([{ code, place: { at: file }, what, remedy }], exit)

const guarded = <T>(file: string, open: () => T): T => {
  try {
    return open()
  } catch (error) {
    if (error instanceof FaultError) throw error
    const code = (error as { code?: string }).code ?? ''
    const remedy = REMEDIES.find(([pattern]) => pattern.test(code))?.[1] ?? 'see that the data folder can be written'
    throw storeFault(file, 'database', (error as Error).message, remedy, EXIT.io)
  }
}

const REMEDIES: readonly (readonly [RegExp, string])[] = [
  [/CORRUPT|NOTADB/, 'the file is damaged: put the last backup in its place'],
  [/CANTOPEN/, 'has the daemon run yet? see `data:` in tendq.yaml'],
  [/FULL/, 'make room on the disk'],
  [/READONLY|EACCES|EPERM|EROFS/, 'give this user the right to write there'],
]
