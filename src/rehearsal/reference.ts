import { referenceOf } from '../series/index.ts'
import type { Occasion, ReferenceState } from '../series/types.ts'
import type { ReferenceTimeline } from './types.ts'

/** What is known of a sample's reference on an instrument. Occasions ascend in time. */
export interface ReferenceFacts {
  /** Each reference that was frozen, oldest first, without what was excluded since. */
  readonly frozen: readonly (readonly Occasion[])[]
  /** The sample's first occasions under the recipe in force; used where nothing was frozen. */
  readonly first: readonly Occasion[]
  readonly need: number
  /** The study asks that a person approve a reference, and nobody has. */
  readonly awaitsApproval: boolean
}

/**
 * The references of a sample as the daemon would have had them: each frozen one from its newest occasion on, and where
 * none was frozen the first `need` occasions. What people decided is taken as known from the beginning.
 */
export const referenceTimeline = ({ frozen, first, need, awaitsApproval }: ReferenceFacts): ReferenceTimeline => {
  const gatheredAt = first.map(({ at }) => at)
  if (frozen.length > 0) {
    const changes = frozen.map((occasions) => ({
      after: occasions.at(-1)?.at ?? -Infinity,
      state: frozenState(occasions),
    }))
    return { gatheredAt, need, changes }
  }
  const last = first[need - 1]
  if (last === undefined) return { gatheredAt, need, changes: [] }
  const state = referenceOf(first, need)
  const why = 'nobody has approved it'
  const held = state.kind === 'ready' && awaitsApproval ? ({ kind: 'refused', why } as const) : state
  return { gatheredAt, need, changes: [{ after: last.at, state: held }] }
}

/** A reference that was there from the beginning: typed in, or refused for good. */
export const constantReference = (state: ReferenceState): ReferenceTimeline => ({
  gatheredAt: [],
  need: 0,
  changes: [{ after: -Infinity, state }],
})

const frozenState = (occasions: readonly Occasion[]): ReferenceState =>
  occasions.length === 0
    ? { kind: 'refused', why: 'every spectrum of the reference was excluded' }
    : referenceOf(occasions, occasions.length, { approved: true })

/** The reference in force for a spectrum measured at this time. Of several, the one frozen last. */
export const referenceAt = ({ gatheredAt, need, changes }: ReferenceTimeline, at: number): ReferenceState =>
  changes.findLast(({ after }) => at > after)?.state ?? {
    kind: 'gathering',
    have: Math.min(need, gatheredAt.filter((time) => time <= at).length),
    need,
  }
