// tsc emits only TypeScript; the numbered SQL schema travels to dist beside the code that reads it.
import { cpSync } from 'node:fs'

cpSync(new URL('../src/store/schema', import.meta.url), new URL('../dist/store/schema', import.meta.url), {
  recursive: true,
})
