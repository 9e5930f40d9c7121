import { expect, it, onTestFinished } from 'vitest'
import { startPool } from '../../src/daemon/pool.ts'

it('a file that hangs is stopped after its time, and those that waited behind it are read all the same', async () => {
  const worker = new URL('./hangingWorker.mjs', import.meta.url)
  const pool = startPool({ threads: 1, timeLimitMs: 1_500, worker })
  onTestFinished(() => pool.stop())
  const read = (file: string) => pool.read({ bytes: new Uint8Array(), file, hints: {} })
  const answers = await Promise.all(['hang', 'a', 'hang', 'b'].map(read))
  expect(answers.map(({ kind }) => kind)).toEqual(['failed', 'read', 'failed', 'read'])
  expect(answers[0]).toMatchObject({ why: expect.stringMatching(/longer than 1.5 s/) })
})
