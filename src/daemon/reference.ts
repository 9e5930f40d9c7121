import { ENGINE } from '../analysis/types.ts'
import { referenceOf, typedReference } from '../series/index.ts'
import type { Occasion, ReferenceState } from '../series/types.ts'
import type { Subject } from './context.ts'
import { occasionsOfRows } from './occasions.ts'
import type { Stations } from './pipeline.ts'
import { occasionsNeeded } from './recipe.ts'

/** Spectra at the most that the first occasions are made of. */
const MOST_SPECTRA = 200

/**
 * What a sample is compared with, inside the transaction that judges it. The first n occasions under the locked
 * recipe become the reference and are frozen. Where those have a slope the reference is refused and said so, for as
 * long as nobody excludes or approves: later occasions would make the product of a decomposition its own reference.
 */
export const referenceStateOf = (subject: Subject, stations: Stations): ReferenceState => {
  const { reference } = subject.study
  if (reference.kind === 'values') return typedReference(reference.values)
  if (reference.kind === 'sample' && reference.sample !== subject.sample)
    return ofSample({ ...subject, sample: reference.sample }, stations)
  return ofSample(subject, stations)
}

const ofSample = (subject: Subject, stations: Stations): ReferenceState => {
  const { store, now } = stations
  const { sample, instrument } = subject
  const frozen = store.recipes.frozenReference(sample, instrument.name)
  if (frozen !== null) return stateOf(occasionsOfRows(store.analyses.some(frozen, sample), subject, store))
  const recipe = store.recipes.of(sample, instrument.name)
  const need = occasionsNeeded(subject)
  if (recipe === null) return { kind: 'gathering', have: 0, need }
  const of = { sample, instrument: instrument.name, recipe: recipe.sha256, engine: ENGINE }
  const occasions = occasionsOfRows(store.analyses.earliest(of, MOST_SPECTRA), subject, store)
  if (!recipe.locked) return { kind: 'gathering', have: Math.min(occasions.length, need), need }
  // a reference sample that was asked for early is complete with what there is of it
  const n = subject.study.reference.kind === 'sample' ? Math.min(need, occasions.length) : need
  if (occasions.length < n || n === 0) return { kind: 'gathering', have: occasions.length, need: Math.max(n, 1) }
  const state = referenceOf(occasions, n)
  if (state.kind === 'ready' && subject.study.approveReference === true)
    return {
      kind: 'refused',
      why: `it awaits approval: tendq approve-reference ${sample} --instrument ${instrument.name}`,
    }
  if (state.kind === 'ready') {
    const spectra = occasions.slice(0, n).flatMap((occasion) => occasion.spectra)
    store.recipes.freezeReference(sample, instrument.name, spectra, now())
  }
  return state
}

/** A frozen reference was found without a slope once; what a person excluded since is left out. */
const stateOf = (occasions: readonly Occasion[]): ReferenceState =>
  occasions.length === 0
    ? { kind: 'refused', why: 'every spectrum of the reference was excluded' }
    : referenceOf(occasions, occasions.length, { approved: true })
