// Prints ratios against general-purpose libraries, each in one run. `npm run bench -- bands` runs one of them.
import { readdirSync } from 'node:fs'

const names = readdirSync(new URL('.', import.meta.url))
  .filter((file) => file.endsWith('.mjs') && file !== 'index.mjs')
  .map((file) => file.replace('.mjs', ''))
const asked = process.argv.slice(2)
const unknown = asked.find((name) => !names.includes(name))
if (unknown !== undefined) {
  process.stderr.write(`${unknown}: no such benchmark; there are: ${names.join(', ')}\n`)
  process.exit(64)
}
for (const name of asked.length > 0 ? asked : names) {
  process.stdout.write(`\n${name}\n`)
  await (await import(`./${name}.mjs`)).run()
}
