import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { decide, type Look, type Sight } from '../../src/intake/settle.ts'
import type { FileMark } from '../../src/intake/types.ts'

const mark: FileMark = { size: 900, mtimeMs: 5_000, ctimeMs: 5_001, inode: 7 }
const look = (change: Partial<Look> = {}): Look => ({ mark, sinceMs: 1_000, incomplete: false, ...change })
const patience = { settleMs: 1_000, giveUpMs: 60_000 }
const sight = (change: Partial<Sight>): Sight => ({
  seen: null,
  previous: null,
  mark,
  nowMs: 1_000,
  restedMs: null,
  ...change,
})

describe('what becomes of a file that was looked at', () => {
  it.each<[title: string, Partial<Sight>, kind: string]>([
    ['a version already dealt with is skipped', { seen: mark }, 'skip'],
    [
      'a version already dealt with is skipped however long it waited',
      { seen: mark, previous: look(), nowMs: 1e9 },
      'skip',
    ],
    ['a new file waits for a second look', {}, 'wait'],
    ['a new version of a known file waits for a second look', { seen: { ...mark, size: 1 } }, 'wait'],
    ['a second look too soon proves nothing', { previous: look(), nowMs: 1_999 }, 'wait'],
    ['unchanged twice: it is read', { previous: look(), nowMs: 2_000 }, 'read'],
    ['a change of size begins anew', { previous: look({ mark: { ...mark, size: 800 } }), nowMs: 2_000 }, 'wait'],
    ['a change of mtime begins anew', { previous: look({ mark: { ...mark, mtimeMs: 4_000 } }), nowMs: 2_000 }, 'wait'],
    ['a change of ctime begins anew', { previous: look({ mark: { ...mark, ctimeMs: 4_000 } }), nowMs: 2_000 }, 'wait'],
    [
      'another file renamed into its place begins anew',
      { previous: look({ mark: { ...mark, inode: 8 } }), nowMs: 2_000 },
      'wait',
    ],
    [
      'read and incomplete: it is not read again at once',
      { previous: look({ incomplete: true }), nowMs: 3_000 },
      'wait',
    ],
    [
      'incomplete, but changed since: it may be whole after the next look',
      { previous: look({ incomplete: true, mark: { ...mark, size: 1 } }), nowMs: 60_900 },
      'wait',
    ],
    [
      'incomplete and just short of a minute unchanged: it waits',
      { previous: look({ incomplete: true }), nowMs: 60_999 },
      'wait',
    ],
    ['unchanged for a minute: it is taken as it is', { previous: look({ incomplete: true }), nowMs: 61_000 }, 'take'],
    [
      'a change in the last moment of the minute begins anew',
      { previous: look({ mark: { ...mark, size: 1 } }), nowMs: 61_000 },
      'wait',
    ],
    [
      'both file times a minute old: it is taken at first sight where they may be trusted',
      { restedMs: 60_000 },
      'take',
    ],
    ['file times less than a minute old prove nothing', { restedMs: 59_999 }, 'wait'],
    ['a file time in the future proves nothing', { restedMs: -5_000 }, 'wait'],
  ])('%s', (_title, change, kind) => {
    expect(decide(sight(change), patience).kind).toBe(kind)
  })

  it('the wait ends when the next decision is due', () => {
    expect(decide(sight({}), patience)).toMatchObject({ kind: 'wait', untilMs: 2_000 })
    expect(decide(sight({ previous: look({ incomplete: true }), nowMs: 3_000 }), patience)).toMatchObject({
      kind: 'wait',
      untilMs: 61_000,
    })
  })

  it('no file is read while it changes, and every file that rests is taken within a minute and a second', () => {
    const sizes = fc.array(fc.record({ size: fc.nat(3), afterMs: fc.integer({ min: 1, max: 30_000 }) }), {
      minLength: 1,
      maxLength: 30,
    })
    fc.assert(
      fc.property(sizes, fc.boolean(), (steps, incomplete) => {
        let previous: Look | null = null
        let nowMs = 0
        let unchangedSince = 0
        let size = -1
        for (const step of steps) {
          nowMs += step.afterMs
          if (step.size !== size) unchangedSince = nowMs
          size = step.size
          const decision = decide({ seen: null, previous, mark: { ...mark, size }, nowMs, restedMs: null }, patience)
          if (decision.kind === 'skip') throw new Error('nothing was seen before')
          if (decision.kind !== 'wait') expect(nowMs - unchangedSince).toBeGreaterThanOrEqual(patience.settleMs)
          if (decision.kind === 'wait') expect(decision.untilMs).toBeGreaterThan(nowMs)
          previous = {
            ...decision.look,
            incomplete: incomplete && decision.kind === 'read' ? true : decision.look.incomplete,
          }
        }
        const rested = decide(
          { seen: null, previous, mark: { ...mark, size }, nowMs: nowMs + 61_000, restedMs: null },
          patience,
        )
        expect(rested.kind).toBe('take')
      }),
    )
  })
})
