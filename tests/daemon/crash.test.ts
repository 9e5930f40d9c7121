import { expect, it, onTestFinished } from 'vitest'
import { headersOf, openMailbox } from '../mail/mailbox.ts'
import { exited, spectrumText, testRoom, until } from './house.ts'

it('a letter whose daemon was killed after the server had it comes again with the same Message-ID, and only once', async () => {
  let kill = (): void => undefined
  const raws: string[] = []
  const box = await openMailbox({
    onData: (stream, _session, done) => {
      const chunks: Buffer[] = []
      stream.on('data', (chunk: Buffer) => chunks.push(chunk))
      stream.on('end', () => {
        raws.push(Buffer.concat(chunks).toString())
        if (raws.length === 1) kill() // the server has the letter, and its answer finds nobody
        done(null)
      })
    },
  })
  onTestFinished(box.close)
  const room = testRoom(box.settings.port)
  room.write('rules/bands.yaml', room.read('rules/bands.yaml').replace('persist: 2', 'persist: 1'))
  room.write('studies/aging.yaml', room.read('studies/aging.yaml').replace('first: 3', 'first: 2'))
  const moved = [[19_731, 3500, 0.45] as const, [26_667, 3900, 0.47] as const]
  for (let i = 0; i < 2; i++) room.drop(`AGE-1_20260302T0${i}00.csv`, spectrumText({ seed: i }))
  await room.run(['run', '--once'])
  const daemon = await room.start()
  kill = () => daemon.kill('SIGKILL')
  room.drop('AGE-1_20260302T0600.csv', spectrumText({ bands: moved, seed: 9 }))
  await until('the server has the letter', () => raws.length === 1)
  await exited(daemon)
  expect(room.rows('SELECT state FROM letters')).toEqual([{ state: 'waiting' }])
  await room.run(['run', '--once'])
  await room.run(['run', '--once'])
  expect(raws).toHaveLength(2)
  expect(new Set(raws.map((raw) => headersOf(raw).get('message-id'))).size).toBe(1)
  expect(room.rows('SELECT state FROM letters')).toEqual([{ state: 'sent' }])
})
