import { describe, expect, it } from 'vitest'
import type { Folder, WaitingLook } from '../../src/intake/folder.ts'
import type { Settled } from '../../src/intake/take.ts'
import { inTheirTurn } from '../../src/intake/turn.ts'

const waitingLook = (mtimeMs: number, dueMs: number, incomplete = false): WaitingLook => ({
  mark: { size: 1, mtimeMs, ctimeMs: mtimeMs, inode: 1 },
  sinceMs: 0,
  incomplete,
  dueMs,
  why: '',
  since: 0,
})

const folderWith = (waiting: Record<string, WaitingLook>): Folder =>
  ({ waiting: new Map(Object.entries(waiting)) }) as unknown as Folder

const settledIn = (folder: Folder, file: string, ifComplete = true): Settled => ({
  folder,
  file,
  path: file,
  look: folder.waiting.get(file)!,
  ifComplete,
})

const NOW = Number.POSITIVE_INFINITY

describe('the order in which a backlog is taken', () => {
  it('a file waits for an older one of its folder that is about to settle, until that is due', () => {
    const folder = folderWith({ old: waitingLook(10, 500), new: waitingLook(20, NOW), older: waitingLook(5, NOW) })
    const taken = inTheirTurn([settledIn(folder, 'new'), settledIn(folder, 'older')])
    expect(taken.map(({ file }) => file)).toEqual(['older'])
    expect(folder.waiting.get('new')?.dueMs).toBe(500)
  })

  it('nothing waits for a file that does not read completely, or for another folder', () => {
    const broken = folderWith({ broken: waitingLook(10, 60_000, true), new: waitingLook(20, NOW) })
    const other = folderWith({ old: waitingLook(1, 500) })
    expect(inTheirTurn([settledIn(broken, 'new')])).toHaveLength(1)
    expect(other.waiting.size).toBe(1)
  })

  it('a file that has waited for as long as a broken one is taken whatever else there is', () => {
    const folder = folderWith({ old: waitingLook(10, 500), new: waitingLook(20, NOW) })
    expect(inTheirTurn([settledIn(folder, 'new', false)])).toHaveLength(1)
  })
})
