// Makes the project ready to build: installs when node_modules is absent, stale, or built for another Node.
// One command then serves on a bare machine (`npm run demo`, `npm test`).
import { spawnSync } from 'node:child_process'
import { existsSync, readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'

const root = dirname(dirname(fileURLToPath(import.meta.url)))

const integrities = (file) => {
  const packages = JSON.parse(readFileSync(join(root, file), 'utf8')).packages
  return new Map(
    Object.entries(packages)
      .filter(([path]) => path !== '')
      .map(([path, entry]) => [path, { integrity: entry.integrity, optional: entry.optional === true }]),
  )
}

/** Every package of the lock stands in node_modules with the same integrity (optional ones may be for another platform). */
const installed = () => {
  if (!existsSync(join(root, 'node_modules/.package-lock.json'))) return false
  const there = integrities('node_modules/.package-lock.json')
  return [...integrities('package-lock.json')].every(
    ([path, wanted]) => there.get(path)?.integrity === wanted.integrity || (wanted.optional && !there.has(path)),
  )
}

/** A native binding built for another Node throws when it opens a database. */
const bindingWorks = () => {
  try {
    const Database = createRequire(join(root, 'package.json'))('better-sqlite3')
    new Database(':memory:').close()
    return true
  } catch {
    return false
  }
}

if (!installed() || !bindingWorks()) {
  const inherited =
    /^npm_config_(loglevel|omit|include|production|ignore_scripts|global|json)$|^npm_(lifecycle|package)_|^npm_command$|^NODE_ENV$/i
  const env = Object.fromEntries(Object.entries(process.env).filter(([name]) => !inherited.test(name)))
  process.stderr.write('installing the packages named in package-lock.json …\n')
  const npm = process.platform === 'win32' ? 'npm.cmd' : 'npm'
  const run = spawnSync(npm, ['ci', '--include=dev', '--no-audit', '--no-fund'], {
    cwd: root,
    env,
    stdio: ['ignore', 2, 2],
  })
  if (run.status !== 0) {
    process.stderr.write(
      'package-lock.json: the packages could not be installed; see the lines above, and the README on what the machine needs\n',
    )
    process.exit(run.status ?? 70)
  }
}
