import { cpSync, mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { afterAll } from 'vitest'
import { loadConfig } from '../../src/config/index.ts'
import type { Config } from '../../src/config/types.ts'
import { type Fault, sayPlace } from '../../src/fault.ts'

export const EXAMPLE = fileURLToPath(new URL('../../config', import.meta.url))

const made: string[] = []
afterAll(() => {
  for (const folder of made) rmSync(folder, { recursive: true, force: true })
})

/** A copy of the shipped example with some files written over; null takes a file away. */
export const exampleWith = (changes: Readonly<Record<string, string | Uint8Array | null>>): string => {
  const room = mkdtempSync(join(tmpdir(), 'tendq-config-'))
  made.push(room)
  const folder = join(room, 'config')
  cpSync(EXAMPLE, folder, { recursive: true })
  for (const [path, content] of Object.entries(changes)) {
    mkdirSync(dirname(join(folder, path)), { recursive: true })
    if (content === null) rmSync(join(folder, path))
    else writeFileSync(join(folder, path), content)
  }
  return folder
}

/** The faults of a changed example, each as `file:line:column what; remedy` with the folder left out. */
export const faultsWith = (changes: Readonly<Record<string, string | Uint8Array | null>>): readonly string[] => {
  const folder = exampleWith(changes)
  const loaded = loadConfig(folder)
  const say = ({ place, what, remedy }: Fault) => `${sayPlace(place)} ${what}; ${remedy}`.replaceAll(`${folder}/`, '')
  return loaded.kind === 'refused' ? loaded.faults.map(say) : []
}

export const configOf = (folder: string): Config => {
  const loaded = loadConfig(folder)
  if (loaded.kind === 'refused') throw new Error(loaded.faults.map(({ what }) => what).join('\n'))
  return loaded.config
}
