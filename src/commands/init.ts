import { copyFileSync, existsSync, mkdirSync, readdirSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import type { Command } from 'commander'
import { EXIT, FaultError } from '../fault.ts'
import { printLine } from './print.ts'

/** The example that travels with the program; the same two steps up from the source and from the build. */
const EXAMPLE = fileURLToPath(new URL('../../config', import.meta.url))

export const addInit = (program: Command): void => {
  program
    .command('init')
    .summary('write a commented starting configuration')
    .description(
      'Writes a commented starting configuration, asking nothing. A folder with anything in it is left alone.',
    )
    .argument('<dir>', 'folder to write it to')
    .addHelpText(
      'after',
      `
Example:
  tendq init north-bench/config
  tendq check --config north-bench/config`,
    )
    .action((dir: string) => {
      refuseOccupied(dir)
      const files = yamlFiles(EXAMPLE)
      try {
        for (const file of files) {
          mkdirSync(dirname(join(dir, file)), { recursive: true })
          copyFileSync(join(EXAMPLE, file), join(dir, file))
        }
      } catch (error) {
        throw fault(
          dir,
          `cannot be written (${codeOf(error)})`,
          'choose another folder, or let this account write there',
        )
      }
      for (const file of files) printLine(join(dir, file))
      printLine('')
      printLine(
        'An example to change: rename the instruments and their drop folders, say whom to tell, delete what is not yours.',
      )
      printLine(`Then: tendq check --config ${dir}`)
    })
}

const refuseOccupied = (dir: string): void => {
  if (!existsSync(dir)) return
  let entries: readonly string[]
  try {
    entries = readdirSync(dir)
  } catch (error) {
    throw fault(dir, `is no folder that can be read (${codeOf(error)})`, 'choose another one')
  }
  if (entries.length > 0)
    throw fault(dir, `holds ${entries[0]} already, and nothing is overwritten`, 'choose a new or empty folder')
}

const fault = (at: string, what: string, remedy: string): FaultError =>
  new FaultError([{ code: 'init', place: { at }, what, remedy }], EXIT.io)

const codeOf = (error: unknown): string => (error as NodeJS.ErrnoException).code ?? String(error)

const yamlFiles = (folder: string): readonly string[] =>
  readdirSync(folder, { recursive: true, encoding: 'utf8' })
    .filter((path) => path.endsWith('.yaml'))
    .sort()
